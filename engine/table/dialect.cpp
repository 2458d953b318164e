#include "table/dialect.hpp"

#include "table/number.hpp"
#include "table/quoting.hpp"
#include "table/sample.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <optional>
#include <tuple>
#include <vector>

namespace formsieve::table {

namespace {

using Rows = std::vector<std::string_view>;
using Cells = std::vector<std::vector<std::string>>;

constexpr std::array kSeparators = {',', ';', '\t'};

bool is_missing(const std::string& cell, const CsvOptions& options) {
  return std::find(options.missing.begin(), options.missing.end(), cell) != options.missing.end();
}

bool is_text_column(std::size_t column, const Cells& cells, const CsvOptions& options) {
  return column >= cells.front().size() ||
         std::find(options.text.begin(), options.text.end(), cells.front()[column]) != options.text.end();
}

Cells split_rows(const Rows& rows, char separator) {
  const Syntax syntax(separator, '.');
  Cells cells;
  cells.reserve(rows.size());
  for (const std::string_view row : rows) cells.push_back(split_row(row, syntax));
  return cells;
}

/// How well a separator explains the sample; the larger, the better, member by member.
struct SeparatorScore {
  std::size_t n_agreeing = 0;  ///< rows as wide as the header
  double numeric_share = 0.0;  ///< of the cells below the header, with either decimal mark
  std::size_t n_columns = 0;

  auto key() const { return std::tuple(n_agreeing, numeric_share, n_columns); }
};

SeparatorScore score_separator(const Rows& rows, char separator, const CsvOptions& options) {
  const Cells cells = split_rows(rows, separator);
  SeparatorScore score;
  score.n_columns = cells.front().size();
  std::size_t n_cells = 0;
  std::size_t n_numeric = 0;
  for (std::size_t row = 1; row < cells.size(); ++row) {
    if (cells[row].size() == score.n_columns) ++score.n_agreeing;
    n_cells += cells[row].size();
    for (const std::string& cell : cells[row])
      if (is_missing(cell, options) || parse_number(cell, '.') || parse_number(cell, ',')) ++n_numeric;
  }
  if (n_cells > 0) score.numeric_share = static_cast<double>(n_numeric) / static_cast<double>(n_cells);
  return score;
}

/// The separator that explains the sample best, or none when no candidate splits the header.
std::optional<char> find_separator(const Rows& rows, const CsvOptions& options) {
  std::optional<char> best;
  SeparatorScore best_score;
  for (const char separator : kSeparators) {
    const SeparatorScore score = score_separator(rows, separator, options);
    if (score.n_columns < 2) continue;
    if (best && score.key() <= best_score.key()) continue;
    best = separator;
    best_score = score;
  }
  return best;
}

std::size_t count_words(std::string_view row, char separator) {
  std::size_t n = 0;
  for (std::size_t at = row.find_first_not_of(separator); at != row.npos;) {
    ++n;
    at = row.find(separator, at);
    at = row.find_first_not_of(separator, at);
  }
  return n;
}

/// True when every sampled row falls into as many words as the header, at least two, and each row below it holds a
/// number among them: no column of plain text does that.
bool is_split_by(const Rows& rows, char separator) {
  const std::size_t n_words = count_words(rows.front(), separator);
  if (n_words < 2 || rows.size() < 2) return false;
  for (std::size_t row = 1; row < rows.size(); ++row) {
    if (count_words(rows[row], separator) != n_words) return false;
    const auto words = split_row(rows[row], Syntax(separator, '.'));
    if (std::none_of(words.begin(), words.end(),
                     [](const std::string& word) { return parse_number(word, '.') || parse_number(word, ','); }))
      return false;
  }
  return true;
}

Status refuse_other_separators(const Rows& rows, const std::string& source) {
  for (const char separator : {'|', ' ', ':'}) {
    if (!is_split_by(rows, separator)) continue;
    const std::string shown = separator == ' ' ? "blanks" : show(std::string(1, separator));
    return Error{ErrorKind::data, "the cells seem to be separated by " + shown, source + ", line 1",
                 "Separate them by commas, semicolons or tabs; if it is one column after all, say so with "
                 "data.separator = \"tab\""};
  }
  return {};
}

MarkEvidence evidence_of_sample(const Cells& cells, char separator, const CsvOptions& options) {
  MarkEvidence evidence;
  for (std::size_t row = 1; row < cells.size(); ++row)
    for (std::size_t column = 0; column < cells[row].size(); ++column)
      if (!is_text_column(column, cells, options) && !is_missing(cells[row][column], options))
        evidence += mark_evidence(cells[row][column], separator);
  return evidence;
}

/// Columns of the sample in which every value is a number under this decimal mark.
std::size_t count_numeric_columns(const Cells& cells, char decimal, const CsvOptions& options) {
  std::size_t n = 0;
  for (std::size_t column = 0; column < cells.front().size(); ++column) {
    bool is_numeric = true;
    for (std::size_t row = 1; row < cells.size() && is_numeric; ++row)
      is_numeric = column >= cells[row].size() || is_missing(cells[row][column], options) ||
                   parse_number(cells[row][column], decimal).has_value();
    n += is_numeric ? 1 : 0;
  }
  return n;
}

/// Evidence of the rows below the header, for files whose first rows hold none; stops at the first sure number.
MarkEvidence evidence_of_file(std::string_view text, const Cells& sample, char separator, const CsvOptions& options) {
  // Without a quote, no cell of a comma-separated file holds a comma.
  if (text.find(separator == ',' ? '"' : ',') == text.npos && text.find('.') == text.npos) return {};
  const Syntax syntax(separator, '.');
  MarkEvidence evidence;
  std::string scratch;
  const char* const end = text.data() + text.size();
  std::size_t column = 0;
  for (const char* p = row_end(text.data(), end); p != end;) {
    const RawCell cell = scan_cell(p, end, syntax);
    if (cell.raw.find_first_of(".,") != cell.raw.npos && !is_text_column(column, sample, options)) {
      const std::string content(cell_text(cell, syntax, scratch).text);
      if (!is_missing(content, options)) evidence += mark_evidence(content, separator);
      if (evidence.point.sure > 0 || evidence.comma.sure > 0) break;
    }
    column = cell.stop != end && *cell.stop == separator ? column + 1 : 0;
    p = cell.stop == end ? end : cell.stop + 1;
  }
  return evidence;
}

void find_decimal(FoundDialect& found, std::string_view text, const Rows& rows, const CsvOptions& options) {
  const char separator = found.dialect.separator;
  const Cells cells = split_rows(rows, separator);
  MarkEvidence evidence = evidence_of_sample(cells, separator, options);
  if (evidence.point.sure == 0 && evidence.comma.sure == 0)
    evidence = evidence_of_file(text, cells, separator, options);

  const MarkCounts& point = evidence.point;
  const MarkCounts& comma = evidence.comma;
  found.decimal_is_sure = point.sure > 0 || comma.sure > 0;
  if (point.sure > 0 && comma.sure > 0) {
    const std::size_t with_point = count_numeric_columns(cells, '.', options);
    const std::size_t with_comma = count_numeric_columns(cells, ',', options);
    const bool is_comma = with_comma != with_point ? with_comma > with_point : comma.sure > point.sure;
    found.dialect.decimal = is_comma ? ',' : '.';
  } else if (point.sure > 0 || comma.sure > 0) {
    found.dialect.decimal = comma.sure > 0 ? ',' : '.';
  } else {
    found.dialect.decimal = comma.open > point.open ? ',' : '.';
    found.decimal_is_open = comma.open + point.open > 0;
  }
}

}  // namespace

Result<FoundDialect> find_dialect(std::string_view text, const std::string& source, const CsvOptions& options) {
  const Rows rows = sample_rows(text);
  FoundDialect found;
  if (options.separator) {
    found.dialect.separator = *options.separator;
  } else if (const std::optional<char> separator = find_separator(rows, options)) {
    found.dialect.separator = *separator;
  } else if (const Status status = refuse_other_separators(rows, source); !status) {
    return status.error();
  }
  if (options.decimal) {
    found.dialect.decimal = *options.decimal;
    found.decimal_is_sure = true;
  } else {
    find_decimal(found, text, rows, options);
  }
  return found;
}

}  // namespace formsieve::table

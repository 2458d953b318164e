#include "table/bytes.hpp"
#include "table/columns.hpp"
#include "table/csv_parser.hpp"
#include "table/dialect.hpp"
#include "table/hash.hpp"
#include "table/header.hpp"
#include "table/number.hpp"
#include "table/opening.hpp"
#include "table/quoting.hpp"
#include "table/typing.hpp"

#include <algorithm>
#include <exception>
#include <limits>
#include <new>
#include <utility>

namespace formsieve::table {

namespace {

/// The reading of one file: the steps of parse_csv share what this holds.
class CsvParse {
 public:
  CsvParse(std::string_view bytes, std::string name, const CsvOptions& options, std::size_t block_bytes)
      : bytes_(bytes),
        options_(options),
        block_bytes_(block_bytes),
        // One block is not worth waking other threads for.
        threads_(bytes.size() <= block_bytes ? 1 : options.threads),
        source_{.name = std::move(name),
                .bytes = bytes,
                .syntax = Syntax(',', '.'),
                .separator_given = false,
                .header = {}} {}

  Result<Table> run() {
    if (Status status = check_options(options_); !status) return status.error();
    if (Status status = check_content(); !status) return status.error();
    if (Status status = settle_dialect(); !status) return status.error();
    Result<RowStart> body = read_header(source_, begin_);
    if (!body) return body.error();
    if (Status status = check_text_columns(source_, options_); !status) return status.error();
    layout_ = lay_out(source_, *body, source_.bytes.size(), block_bytes_, threads_);
    if (Status status = check_row_count(); !status) return status.error();
    read_all_columns(*body);
    if (Status status = check_faults(); !status) return status.error();
    read_again();
    return take_table();
  }

 private:
  /// A file must hold text; takes note of a byte order mark.
  Status check_content() {
    const Result<std::size_t> mark = table::check_content(bytes_, source_.name);
    if (!mark) return mark.error();
    begin_ = *mark;
    table_.dialect.byte_order_mark = begin_ > 0;
    return {};
  }

  Status settle_dialect() {
    const Result<FoundDialect> found = find_dialect(bytes_.substr(begin_), source_.name, options_);
    if (!found) return found.error();
    table_.dialect.separator = found->dialect.separator;
    table_.dialect.decimal = found->dialect.decimal;
    decimal_is_open_ = found->decimal_is_open;
    source_.syntax = Syntax(table_.dialect.separator, table_.dialect.decimal);
    source_.separator_given = options_.separator.has_value();
    source_.bytes = bytes_.substr(0, find_table_end(bytes_, table_.dialect.separator));
    return {};
  }

  Status check_row_count() const {
    if (layout_.n_rows == 0)
      return Error{ErrorKind::data, "the file holds names of columns but no rows", source_.name + ", line 1",
                   "Add at least one row of values below the names"};
    if (layout_.n_rows >= kMissingLevel)
      return data_error("the file has more than " + std::to_string(kMissingLevel - 1) + " rows",
                        "Split it, or draw a sample of its rows");
    return {};
  }

  MissingMarkers missing() const { return {options_.missing, table_.dialect.decimal}; }

  void read_all_columns(RowStart body) {
    const std::vector<ReadAs> guess = guess_reading(source_, body, missing(), options_.text);
    raw_ = read_columns(source_, layout_, missing(), guess, true, threads_,
                        [this] { table_.sha256 = sha256_hex(bytes_); });
    for (const RawColumn& column : raw_.columns) judgements_.push_back(judge_column(column, table_.dialect.decimal));
    for (std::size_t column = 0; column < judgements_.size(); ++column)
      if (is_declared_text(column)) judgements_[column].verdict = Verdict::text;
  }

  bool is_declared_text(std::size_t column) const {
    return std::find(options_.text.begin(), options_.text.end(), source_.header[column]) != options_.text.end();
  }

  /// The earliest fault of the file, whatever its kind: byte, quote, row or cell.
  Status check_faults() const {
    std::optional<Fault> fault = layout_.byte_fault;
    if (raw_.fault) keep_earliest(fault, *raw_.fault);
    const std::optional<std::size_t> odd = earliest_odd_column();
    const RowStart odd_row = odd ? layout_.start_of_row(bytes_, judgements_[*odd].first_odd_row) : RowStart{};
    if (fault && (!odd || fault->row_begin <= odd_row.offset))
      return describe_fault(source_, *fault, locate(source_, layout_.start_before(fault->offset), fault->offset));
    if (odd) return odd_cell_error(*odd, odd_row);
    return decimal_is_open_ ? check_open_decimal() : Status{};
  }

  /// The column in doubt whose first odd value comes first.
  std::optional<std::size_t> earliest_odd_column() const {
    std::optional<std::size_t> earliest;
    for (std::size_t column = 0; column < judgements_.size(); ++column) {
      if (judgements_[column].verdict != Verdict::in_doubt) continue;
      if (!earliest || judgements_[column].first_odd_row < judgements_[*earliest].first_odd_row) earliest = column;
    }
    return earliest;
  }

  /// The raw cell of a row and column.
  RawCell cell_of(RowStart row, std::size_t column) const {
    const char* const end = source_.bytes.data() + source_.bytes.size();
    RawCell cell = scan_cell(source_.bytes.data() + row.offset, end, source_.syntax);
    for (std::size_t i = 0; i < column; ++i) cell = scan_cell(cell.stop + 1, end, source_.syntax);
    return cell;
  }

  std::string place_of(RowStart row, std::size_t column) const {
    const char* const cell = cell_of(row, column).raw.data();
    const auto line = row.line + static_cast<std::uint64_t>(std::count(bytes_.data() + row.offset, cell, '\n'));
    return describe_place(source_, line, column);
  }

  Error odd_cell_error(std::size_t column, RowStart row) const {
    return describe_odd_cell(judgements_[column], place_of(row, column), source_.header[column], table_.dialect.decimal,
                             options_.missing);
  }

  /// With the decimal mark left open by the file, no cell of a numeric column may depend on it.
  Status check_open_decimal() const {
    const std::string_view bytes = source_.bytes;
    const char* const end = bytes.data() + bytes.size();
    RowStart row = layout_.start_of_row(bytes, 0);
    std::string scratch;
    std::size_t column = 0;
    for (const char* p = bytes.data() + row.offset; p != end;) {
      const RawCell cell = scan_cell(p, end, source_.syntax);
      const std::string_view content = cell_text(cell, source_.syntax, scratch).text;
      if (judgements_[column].verdict == Verdict::numeric && has_one_group_of_three(content, table_.dialect.decimal))
        return open_decimal_error(std::string(content), row, column);
      const bool ends_row = cell.stop == end || *cell.stop == '\n';
      p = cell.stop == end ? end : cell.stop + 1;
      column = ends_row ? 0 : column + 1;
      if (ends_row) row.offset = static_cast<std::size_t>(p - bytes.data());
    }
    return {};
  }

  Error open_decimal_error(const std::string& cell, RowStart row, std::size_t column) const {
    // Lines are counted only now, since hardly any file comes here.
    row.line = 1 + static_cast<std::uint64_t>(std::count(bytes_.data(), bytes_.data() + row.offset, '\n'));
    const bool is_comma = table_.dialect.decimal == ',';
    std::string whole = cell;
    whole.erase(whole.find(table_.dialect.decimal), 1);
    std::string fraction = cell;
    std::replace(fraction.begin(), fraction.end(), ',', '.');
    return {ErrorKind::data,
            show(cell) + " may mean " + fraction + " or " + whole + ", and no number in the file tells which",
            place_of(row, column),
            std::string("If the mark is a decimal mark, say so: data.decimal = ") +
                (is_comma ? "\"comma\"" : "\"point\"") + "; if it separates thousands, write the numbers without it"};
  }

  /// Reads the columns whose type the first rows did not foretell.
  void read_again() {
    std::vector<ReadAs> read_as(raw_.columns.size(), ReadAs::nothing);
    for (std::size_t column = 0; column < read_as.size(); ++column) {
      const ReadAs wanted = judgements_[column].verdict == Verdict::text ? ReadAs::text : ReadAs::number;
      if (raw_.columns[column].read_as != wanted) read_as[column] = wanted;
    }
    if (std::all_of(read_as.begin(), read_as.end(), [](ReadAs as) { return as == ReadAs::nothing; })) return;
    again_ = read_columns(source_, layout_, missing(), read_as, false, threads_, {});
    for (std::size_t column = 0; column < read_as.size(); ++column)
      if (read_as[column] != ReadAs::nothing) raw_.columns[column] = std::move(again_.columns[column]);
  }

  Table take_table() {
    table_.source = source_.name;
    table_.n_rows = layout_.n_rows;
    table_.line_of_row = std::move(raw_.line_of_row);
    for (std::size_t i = 0; i < raw_.columns.size(); ++i) {
      RawColumn& raw = raw_.columns[i];
      Column column;
      column.name = source_.header[i];
      column.n_missing = raw.n_missing;
      column.type = judgements_[i].verdict == Verdict::text ? ColumnType::text : ColumnType::numeric;
      column.numbers = std::move(raw.numbers);
      column.codes = std::move(raw.codes);
      for (const LevelIndex::Level& level : raw.texts.levels()) column.levels.emplace_back(level.text);
      table_.columns.push_back(std::move(column));
    }
    return std::move(table_);
  }

  Error data_error(std::string message, std::string hint) const {
    return {ErrorKind::data, std::move(message), source_.name, std::move(hint)};
  }

  std::string_view bytes_;
  const CsvOptions& options_;
  std::size_t block_bytes_;
  unsigned threads_;
  Source source_;
  std::size_t begin_ = 0;  ///< of the header, behind the byte order mark
  bool decimal_is_open_ = false;
  Layout layout_;
  RawColumns raw_;
  RawColumns again_;
  std::vector<Judgement> judgements_;
  Table table_;
};

}  // namespace

Result<Table> parse_csv(std::string_view bytes, const std::string& source, const CsvOptions& options,
                        std::size_t block_bytes) {
  return CsvParse(bytes, source, options, block_bytes).run();
}

Result<Table> read_csv(const std::string& path, const CsvOptions& options) {
  try {
    Result<FileBytes> bytes = read_file(path, options.threads);
    if (!bytes) return bytes.error();
    return parse_csv(bytes->view(), path, options);
  } catch (const std::bad_alloc&) {
    return Error{ErrorKind::io, "there is not enough memory to read the file", path,
                 "Reading takes about twice the size of the file; free memory, or draw a sample of the rows"};
  } catch (const std::exception& exception) {
    return Error{ErrorKind::internal, std::string("reading failed: ") + exception.what(), path, {}};
  }
}

}  // namespace formsieve::table

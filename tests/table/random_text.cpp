#include "random_text.hpp"

#include <cstdio>
#include <cstdlib>
#include <cstring>

namespace formsieve::table::test {

namespace {

std::size_t below(std::mt19937_64& random, std::size_t n) { return static_cast<std::size_t>(random() % n); }

template <class T, std::size_t n>
const T& pick(const T (&choices)[n], std::mt19937_64& random) {
  return choices[below(random, n)];
}

std::string random_number(std::mt19937_64& random, double& value) {
  const char* const formats[] = {"%.0f", "%.1f", "%.2f", "%.5f", "%.17g", "%.3e"};
  std::normal_distribution<double> normal(0.0, 1000.0);
  char buffer[64];
  std::snprintf(buffer, sizeof buffer, pick(formats, random), normal(random));
  value = std::strtod(buffer, nullptr);
  std::string number = buffer;
  if (buffer[0] != '-' && below(random, 5) == 0) number.insert(number.begin(), '+');
  return number;
}

std::string random_words(std::mt19937_64& random) {
  const char* const pieces[] = {"a", "pear", "cold store", ",", ";", "\t",  "\"", "\"\"", "\n", "\r\n",
                                "é", "零",   "𝛼",          " ", "'", "x=1", "",   "\n\n", "–",  "\\"};
  std::string words = "w";  // neither a number nor a missing marker
  for (std::size_t i = below(random, 6); i > 0; --i) words += pick(pieces, random);
  return words + "z";
}

std::string quoted(const std::string& content) {
  std::string text = "\"";
  for (const char c : content) text += c == '"' ? "\"\"" : std::string(1, c);
  return text + "\"";
}

/// How the cells of one table are written.
struct Style {
  char separator;
  std::string line_end;
  std::size_t quoting;  ///< one cell in so many is quoted without need; 0: none
  bool has_blanks;
};

std::string written(const std::string& content, const Style& style, std::mt19937_64& random) {
  const bool must_quote = content.find_first_of(std::string("\"\r\n") + style.separator) != content.npos;
  std::string cell = must_quote || (style.quoting > 0 && below(random, style.quoting) == 0) ? quoted(content) : content;
  if (style.has_blanks && below(random, 4) == 0) cell = "  " + cell + " ";
  return cell;
}

RandomColumn random_column(std::size_t index, std::size_t n_rows, std::mt19937_64& random) {
  RandomColumn column;
  column.name = "column " + std::to_string(index) + (below(random, 4) == 0 ? ", \"odd\"" : "");
  column.is_text = below(random, 3) == 0;
  column.is_missing.assign(n_rows, false);
  column.numbers.resize(n_rows);
  column.texts.resize(n_rows);
  return column;
}

/// Draws the content of one cell and returns it as text with a decimal point.
std::string random_content(RandomColumn& column, std::size_t row, std::mt19937_64& random) {
  const char* const markers[] = {"", "NA", "N/A", "null", ".", "-"};
  if (below(random, 8) == 0) {
    column.is_missing[row] = true;
    return pick(markers, random);
  }
  if (!column.is_text) return random_number(random, column.numbers[row]);
  return column.texts[row] = random_words(random);
}

std::uint64_t count_lines(const std::string& text) {
  std::uint64_t n = 0;
  for (const char c : text) n += c == '\n' ? 1 : 0;
  return n;
}

void hex(std::string& out, double value) {
  std::uint64_t bits = 0;
  std::memcpy(&bits, &value, 8);
  out += std::to_string(bits) + " ";
}

}  // namespace

RandomText random_text(std::mt19937_64& random, std::size_t n_rows) {
  RandomText table;
  const char separators[] = {',', ';', '\t'};
  table.separator = pick(separators, random);
  table.decimal = below(random, 2) == 0 ? '.' : ',';
  const char* const line_ends[] = {"\n", "\r\n"};
  const std::size_t quotings[] = {0, 1, 2, 8};
  const Style style{table.separator, pick(line_ends, random), pick(quotings, random), below(random, 2) == 0};
  const std::size_t n_columns = 2 + below(random, 5);
  for (std::size_t i = 0; i < n_columns; ++i) table.columns.push_back(random_column(i, n_rows, random));

  std::string& text = table.text;
  if (below(random, 3) == 0) text += "\xEF\xBB\xBF";
  for (std::size_t i = 0; i < n_columns; ++i) {
    if (i > 0) text += style.separator;
    text += written(table.columns[i].name, style, random);
  }
  std::uint64_t line = 1;
  for (std::size_t row = 0; row < n_rows; ++row) {
    text += style.line_end;
    table.line_of_row.push_back(++line);
    const std::size_t row_begin = text.size();
    for (std::size_t i = 0; i < n_columns; ++i) {
      std::string content = random_content(table.columns[i], row, random);
      if (!table.columns[i].is_text && !table.columns[i].is_missing[row] && table.decimal == ',')
        if (const std::size_t mark = content.find('.'); mark != content.npos) content[mark] = ',';
      if (i > 0) text += style.separator;
      text += written(content, style, random);
    }
    line += count_lines(text.substr(row_begin));
  }
  if (below(random, 2) == 0) text += style.line_end;
  return table;
}

std::string damaged(std::string text, std::mt19937_64& random) {
  const std::string odd("\"\"\n\r,;\t.\0\x80\xC3\xFF x1-", 17);
  for (std::size_t i = 1 + below(random, 3); i > 0 && !text.empty(); --i) {
    const std::size_t at = below(random, text.size());
    switch (below(random, 5)) {
      case 0:
        text.erase(at, 1 + below(random, 3));
        break;
      case 1:
        text.insert(at, 1, odd[below(random, odd.size())]);
        break;
      case 2:
        text[at] = odd[below(random, odd.size())];
        break;
      case 3:
        text.insert(at, text.substr(below(random, text.size()), below(random, 20)));
        break;
      default:
        text.resize(at);
    }
  }
  return text;
}

std::string describe(const Result<Table>& result) {
  if (!result) {
    const Error& error = result.error();
    return "error " + std::to_string(static_cast<int>(error.kind)) + "\n" + error.message + "\n" + error.where + "\n" +
           error.hint;
  }
  std::string text = result->source + " " + result->sha256 + " " + std::to_string(result->n_rows) + "\n";
  text += result->dialect.separator;
  text += result->dialect.decimal;
  text += result->dialect.byte_order_mark ? " mark\n" : "\n";
  for (const std::uint64_t line : result->line_of_row) text += std::to_string(line) + " ";
  for (const Column& column : result->columns) {
    text += "\n" + column.name + (column.type == ColumnType::text ? " text " : " numeric ") +
            std::to_string(column.n_missing) + "\n";
    for (const double number : column.numbers) hex(text, number);
    for (const std::uint32_t code : column.codes) text += std::to_string(code) + " ";
    for (const std::string& level : column.levels) text += "[" + level + "]";
  }
  return text;
}

}  // namespace formsieve::table::test

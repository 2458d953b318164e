#include "table/faults.hpp"

#include "table/encoding.hpp"
#include "table/quoting.hpp"

#include <algorithm>
#include <tuple>

namespace formsieve::table {

namespace {

constexpr const char* kDoubleQuotesHint = "a double quote inside a quoted cell is written twice (\"\")";

bool is_row_fault(FaultKind kind) { return kind == FaultKind::empty_line || kind == FaultKind::ragged_row; }

std::string separator_in_words(char separator) {
  return separator == ',' ? "comma" : separator == ';' ? "semicolon" : "tab";
}

std::string byte_in_words(const Source& source, std::size_t offset) {
  return "byte " + std::to_string(source.bytes_before + offset + 1) + " of the file";
}

RawCell cell_at(const Source& source, std::size_t offset) {
  const char* begin = source.bytes.data();
  return scan_cell(begin + offset, begin + source.bytes.size(), source.syntax);
}

Error data_error(std::string message, std::string hint) {
  return {ErrorKind::data, std::move(message), {}, std::move(hint)};
}

Error describe_nul(const Source& source, const Fault& fault) {
  return data_error("a NUL byte, " + byte_in_words(source, fault.offset) + ", has no place in text",
                    "The file is probably no text, damaged, or saved as UTF-16; save it again as UTF-8");
}

Error describe_invalid_utf8(const Source& source, const Fault& fault) {
  return data_error(
      byte_in_words(source, fault.offset) + " (" + show(source.bytes.substr(fault.offset, 1)) + ") is not valid UTF-8",
      "Save the file as UTF-8; if it is in an old one-byte encoding: iconv -f WINDOWS-1252 -t UTF-8 "
      "old.csv > new.csv");
}

Error describe_carriage_return(const Source& source, const Fault& fault) {
  return data_error("a carriage return without a line feed after it, " + byte_in_words(source, fault.offset),
                    "Rows end in LF or CR LF; convert the file: tr '\\r' '\\n' < old.csv > new.csv");
}

Error describe_quote_in_cell(const Source& source, const Fault& fault) {
  const std::string_view raw = source.syntax.trim(cell_at(source, fault.offset).raw);
  // A stray quote swallows what follows it, so only the start of the cell is sure to belong to it.
  const std::size_t shown = raw.find_first_of(std::string{source.syntax.separator(), '\n'});
  return data_error("a double quote inside the unquoted cell " + show(raw.substr(0, shown)),
                    std::string("Put the whole cell in double quotes; ") + kDoubleQuotesHint);
}

Error describe_text_after_quote(const Source& source, const Fault& fault, std::uint64_t line) {
  const std::string_view bytes = source.bytes;
  std::size_t at = fault.offset + 1;  // behind the opening quote; finds the one that closes it
  for (;;) {
    at = bytes.find('"', at) + 1;
    if (bytes[at] != '"') break;
    ++at;
  }
  const std::size_t rest_end = bytes.find_first_of(std::string{source.syntax.separator(), '\n'}, at);
  const std::string rest = show(bytes.substr(at, std::max<std::size_t>(rest_end - at, 1)));
  const std::string_view cell = bytes.substr(fault.offset, at - fault.offset);
  const auto n_feeds = static_cast<std::uint64_t>(std::count(cell.begin(), cell.end(), '\n'));
  if (n_feeds > 0)
    return data_error("a quoted cell that is closed on line " + std::to_string(line + n_feeds) + " is followed by " +
                          rest + " instead of a separator",
                      "A closing quote is probably missing on line " + std::to_string(line) + "; " + kDoubleQuotesHint);
  return data_error("the quoted cell " + show(cell) + " is followed by " + rest + " instead of a separator",
                    "Put the whole cell in double quotes; " + std::string(kDoubleQuotesHint));
}

Error describe_unclosed_quote(const Source& source, const Fault& fault) {
  const std::string_view start = source.bytes.substr(fault.offset, 200);
  return data_error("a quoted cell is never closed: " + show(start.substr(0, start.find('\n'))),
                    std::string("Add the closing double quote; ") + kDoubleQuotesHint);
}

bool ends_with_separator(const Source& source, const Fault& fault) {
  const char* const begin = source.bytes.data() + fault.row_begin;
  const char* const end = row_end(begin, source.bytes.data() + source.bytes.size());
  const std::string_view row(begin, static_cast<std::size_t>(end - begin));
  const std::size_t last = row.find_last_not_of(source.syntax.separator() == '\t' ? " \r\n" : " \t\r\n");
  return last != row.npos && row[last] == source.syntax.separator();
}

std::string ragged_hint(const Source& source, const Fault& fault) {
  const std::string separator(1, source.syntax.separator());
  const std::size_t n_columns = source.header.size();
  std::string hint;
  if (fault.n_cells > n_columns) {
    hint = "A cell that contains the separator " + show(separator) + " must be in double quotes";
    if (ends_with_separator(source, fault)) return "The row ends with a separator; remove it";
    if (source.syntax.separator() == ',') hint += ", as must a number with a decimal comma";
  } else {
    hint = "Add the missing cells; a cell without a value is left empty between its separators";
  }
  if (n_columns == 1) hint = "The first line must hold the names of all columns";
  if (source.separator_given) return hint + " (separator " + separator_in_words(source.syntax.separator()) + " as set)";
  return hint + "; if the " + separator_in_words(source.syntax.separator()) +
         " is not the separator, say which: data.separator = \"" +
         (source.syntax.separator() == ';' ? "comma" : "semicolon") + "\"";
}

Error describe_ragged_row(const Source& source, const Fault& fault) {
  return data_error("the row has " + count(fault.n_cells, "cell", "cells") + " where the header has " +
                        std::to_string(source.header.size()),
                    ragged_hint(source, fault));
}

Error describe_empty_line(const Source& source) {
  if (source.header.empty())
    return data_error("the first line is empty", "Start the file with the names of the columns");
  return data_error("an empty line in the middle of the table",
                    "Remove the line; lines without content are let pass only at the end of the file");
}

Error describe_kind(const Source& source, const Fault& fault, std::uint64_t line) {
  switch (fault.kind) {
    case FaultKind::nul_byte:
      return describe_nul(source, fault);
    case FaultKind::invalid_utf8:
      return describe_invalid_utf8(source, fault);
    case FaultKind::lone_carriage_return:
      return describe_carriage_return(source, fault);
    case FaultKind::quote_in_cell:
      return describe_quote_in_cell(source, fault);
    case FaultKind::text_after_quote:
      return describe_text_after_quote(source, fault, line);
    case FaultKind::unclosed_quote:
      return describe_unclosed_quote(source, fault);
    case FaultKind::empty_line:
      return describe_empty_line(source);
    case FaultKind::ragged_row:
      return describe_ragged_row(source, fault);
  }
  return {};
}

}  // namespace

bool is_earlier(const Fault& a, const Fault& b) noexcept {
  return std::tuple(a.row_begin, is_row_fault(a.kind), a.offset) <
         std::tuple(b.row_begin, is_row_fault(b.kind), b.offset);
}

void keep_earliest(std::optional<Fault>& earliest, const Fault& fault) noexcept {
  if (!earliest || is_earlier(fault, *earliest)) earliest = fault;
}

FaultKind fault_kind(CellFault fault) noexcept {
  switch (fault) {
    case CellFault::quote_in_cell:
      return FaultKind::quote_in_cell;
    case CellFault::text_after_quote:
      return FaultKind::text_after_quote;
    case CellFault::unclosed_quote:
      return FaultKind::unclosed_quote;
    case CellFault::lone_carriage_return:
    case CellFault::none:
      break;
  }
  return FaultKind::lone_carriage_return;
}

Position locate(const Source& source, RowStart from, std::size_t offset) {
  const std::string_view bytes = source.bytes;
  const char* const end = bytes.data() + bytes.size();
  Position position{from, from.line, 0};
  for (;;) {
    const std::size_t begin = position.row.offset;
    const auto next = static_cast<std::size_t>(row_end(bytes.data() + begin, end) - bytes.data());
    if (next > offset || next == bytes.size()) break;
    const std::string_view row = bytes.substr(begin, next - begin);
    position.row = {next, position.row.line + static_cast<std::uint64_t>(std::count(row.begin(), row.end(), '\n'))};
  }
  const char* p = bytes.data() + position.row.offset;
  const char* const target = bytes.data() + offset;
  for (;;) {
    const RawCell cell = scan_cell(p, end, source.syntax);
    if (cell.stop >= target || cell.stop == end || *cell.stop == '\n') break;
    p = cell.stop + 1;
    ++position.column;
  }
  position.line =
      position.row.line + static_cast<std::uint64_t>(std::count(bytes.data() + position.row.offset, target, '\n'));
  return position;
}

std::string describe_place(const Source& source, std::uint64_t line, std::size_t column) {
  std::string place = source.name + ", line " + std::to_string(line) + ", column ";
  if (column < source.header.size() && !source.header[column].empty()) return place + show(source.header[column]);
  return place + std::to_string(column + 1);
}

Error describe_fault(const Source& source, const Fault& fault, const Position& position) {
  Error error = describe_kind(source, fault, position.line);
  std::size_t column = position.column;
  // A short row is at fault where its first cell is missing, a long one where its first surplus cell stands.
  if (fault.kind == FaultKind::ragged_row) column = std::min(fault.n_cells, source.header.size());
  if (fault.kind == FaultKind::empty_line) {
    error.where = source.name + ", line " + std::to_string(position.line);
  } else {
    error.where = describe_place(source, position.line, column);
  }
  return error;
}

}  // namespace formsieve::table

#include "table/header.hpp"

#include "table/blocks.hpp"
#include "table/number.hpp"
#include "table/quoting.hpp"

#include <algorithm>
#include <optional>
#include <string>
#include <unordered_map>

namespace formsieve::table {

namespace {

/// Length at which a list of column names in a message stops.
constexpr std::size_t kListedBytes = 400;

struct HeaderCells {
  std::vector<std::string> names;
  std::vector<std::size_t> offsets;  ///< of the cells in the file
  bool are_all_numbers = true;       ///< and not in quotes
  std::optional<Fault> fault;        ///< the first; nothing behind it has been read
};

Error name_error(const Source& source, std::string message, std::size_t offset, std::size_t begin, std::string hint) {
  const Position position = locate(source, {begin, 1}, offset);
  return {ErrorKind::data, std::move(message),
          source.name + ", line " + std::to_string(position.line) + ", column " + std::to_string(position.column + 1),
          std::move(hint)};
}

HeaderCells split_header(const Source& source, std::size_t begin, std::size_t end) {
  HeaderCells header;
  std::string scratch;
  const char* const text = source.bytes.data();
  for (const char* p = text + begin;;) {
    const RawCell cell = scan_cell(p, text + end, source.syntax);
    const CellText content = cell_text(cell, source.syntax, scratch);
    const auto offset = static_cast<std::size_t>(p - text);
    if (content.fault != CellFault::none) {
      header.fault = Fault{fault_kind(content.fault), begin, offset + content.fault_at};
      return header;
    }
    header.names.emplace_back(content.text);
    header.offsets.push_back(offset);
    if (cell.has_quotes || !parse_number(content.text, source.syntax.decimal())) header.are_all_numbers = false;
    if (cell.stop == text + end || *cell.stop == '\n') return header;
    p = cell.stop + 1;
  }
}

std::string empty_name_hint(const Source& source, std::size_t begin, const HeaderCells& header, std::size_t column) {
  if (source.bytes.substr(begin, 4) == "sep=") return "Remove the first line, a note to spreadsheet programs";
  if (column + 1 == header.names.size())
    return "The first line ends with a separator: remove it there and in every row, or name the column";
  return "Name every column in the first line";
}

Status check_names(const Source& source, std::size_t begin, const HeaderCells& header) {
  std::unordered_map<std::string, std::size_t> first_with;
  for (std::size_t column = 0; column < header.names.size(); ++column) {
    const std::string& name = header.names[column];
    if (name.empty())
      return name_error(source, "column " + std::to_string(column + 1) + " has no name", header.offsets[column], begin,
                        empty_name_hint(source, begin, header, column));
    const auto [first, is_new] = first_with.emplace(name, column);
    if (!is_new)
      return name_error(source,
                        "columns " + std::to_string(first->second + 1) + " and " + std::to_string(column + 1) +
                            " are both named " + show(name),
                        header.offsets[column], begin, "Give every column a name of its own in the first line");
  }
  if (header.are_all_numbers)
    return name_error(source, "the first line holds numbers, not names of columns", begin, begin,
                      "Add a first line that names the columns; names that are numbers must be in double quotes");
  return {};
}

}  // namespace

Result<RowStart> read_header(Source& source, std::size_t begin) {
  const std::string_view bytes = source.bytes;
  const auto end = static_cast<std::size_t>(row_end(bytes.data() + begin, bytes.data() + bytes.size()) - bytes.data());
  const std::string_view line = bytes.substr(begin, end - begin);
  std::optional<Fault> earliest;
  if (const auto fault = find_byte_fault(bytes.substr(0, end), begin, end))
    earliest = Fault{fault->kind, begin, fault->offset};
  if (line.find_first_not_of(" \t\r\n") == line.npos) keep_earliest(earliest, {FaultKind::empty_line, begin, begin});
  HeaderCells header = split_header(source, begin, end);
  if (header.fault) keep_earliest(earliest, *header.fault);
  if (earliest) return describe_fault(source, *earliest, locate(source, {begin, 1}, earliest->offset));
  if (const Status status = check_names(source, begin, header); !status) return status.error();
  source.header = std::move(header.names);
  return RowStart{end, 1 + static_cast<std::uint64_t>(std::count(line.begin(), line.end(), '\n'))};
}

Status check_text_columns(const Source& source, const CsvOptions& options) {
  for (const std::string& name : options.text) {
    if (std::find(source.header.begin(), source.header.end(), name) != source.header.end()) continue;
    std::string known;
    for (const std::string& column : source.header) {
      if (known.size() > kListedBytes) {
        known += ", …";
        break;
      }
      known += (known.empty() ? "" : ", ") + show(column);
    }
    return Error{ErrorKind::usage, "there is no column " + show(name) + " to take as text", source.name,
                 "data.text names columns of the table, which has " + known};
  }
  return {};
}

}  // namespace formsieve::table

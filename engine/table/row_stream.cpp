#include "table/row_stream.hpp"

#include "table/dialect.hpp"
#include "table/header.hpp"
#include "table/number.hpp"
#include "table/opening.hpp"
#include "table/quoting.hpp"
#include "table/typing.hpp"

#include <algorithm>
#include <utility>

namespace formsieve::table {

namespace {

/// Whole rows in the stretch, which starts outside quotes: behind the last line feed outside quotes, or 0.
std::size_t end_of_rows(std::string_view bytes) {
  if (bytes.find('"') == bytes.npos) {
    const std::size_t feed = bytes.rfind('\n');
    return feed == bytes.npos ? 0 : feed + 1;
  }
  const char* const begin = bytes.data();
  const char* const end = begin + bytes.size();
  const char* last = begin;
  for (const char* p = begin; p != end;) {
    p = row_end(p, end);
    if (p[-1] != '\n') break;
    if (p != end) {
      last = p;
      continue;
    }
    // row_end also stops at the end inside quotes, where the last line feed ends no row.
    if (std::count(last, end, '"') % 2 == 0) last = end;
  }
  return static_cast<std::size_t>(last - begin);
}

/// The raw cell of a column in the row at `begin`.
RawCell cell_of(const Source& source, std::size_t begin, std::size_t column) {
  const char* const end = source.bytes.data() + source.bytes.size();
  RawCell cell = scan_cell(source.bytes.data() + begin, end, source.syntax);
  for (std::size_t i = 0; i < column; ++i) cell = scan_cell(cell.stop + 1, end, source.syntax);
  return cell;
}

std::string place_of(const Source& source, RowStart row, std::size_t column) {
  const char* const cell = cell_of(source, row.offset, column).raw.data();
  const char* const begin = source.bytes.data() + row.offset;
  return describe_place(source, row.line + static_cast<std::uint64_t>(std::count(begin, cell, '\n')), column);
}

/// Start of the row with this index in the block.
RowStart start_of(const Source& source, const RowBlock& block, std::size_t row) {
  const char* const begin = source.bytes.data();
  const char* p = begin;
  for (std::size_t i = block.first_row; i < row; ++i) p = row_end(p, begin + source.bytes.size());
  return {static_cast<std::size_t>(p - begin),
          block.first_line + static_cast<std::uint64_t>(std::count(begin, p, '\n'))};
}

/// A text found in a column of numbers.
struct Stray {
  std::size_t row = 0, column = 0;
  std::string cell;
};

std::optional<Stray> earliest_stray(const BlockReading& reading, std::span<const ColumnSink> sinks) {
  std::optional<Stray> stray;
  for (std::size_t column = 0; column < sinks.size(); ++column) {
    const auto texts = reading.columns[column].texts.levels();
    if (sinks[column].read_as != ReadAs::number || texts.empty()) continue;
    if (!stray || texts.front().first_row < stray->row)
      stray = Stray{texts.front().first_row, column, std::string(texts.front().text)};
  }
  return stray;
}

}  // namespace

RowStream::RowStream(ByteReader reader, std::string name, const CsvOptions& options, std::size_t block_bytes)
    : reader_(std::move(reader)),
      options_(options),
      block_bytes_(std::max<std::size_t>(1, block_bytes)),
      source_{.name = std::move(name), .bytes = {}, .syntax = Syntax(',', '.'), .separator_given = false, .header = {}},
      missing_(options.missing, '.') {}

/// Reads on until the buffer holds this much, or the text ends.
Status RowStream::fill(std::size_t wanted) {
  std::size_t held = buffer_.size();
  if (held >= wanted || at_end_) return {};
  buffer_.resize(wanted);
  while (held < wanted && !at_end_) {
    const Result<std::size_t> n = reader_(std::span<char>(buffer_).subspan(held));
    if (!n) {
      buffer_.resize(held);
      return n.error();
    }
    at_end_ = *n == 0;
    held += *n;
  }
  buffer_.resize(held);
  return {};
}

Status RowStream::open() {
  if (Status status = check_options(options_); !status) return status;
  // The dialect is judged by the same first stretch whatever the size of a block.
  if (Status status = fill(std::max(block_bytes_, kDialectBytes)); !status) return status;
  const std::string_view bytes(buffer_.data(), buffer_.size());
  const Result<std::size_t> mark = check_content(bytes, source_.name);
  if (!mark) return mark.error();
  const Result<FoundDialect> found = find_dialect(bytes.substr(*mark), source_.name, options_);
  if (!found) return found.error();
  source_.syntax = Syntax(found->dialect.separator, found->dialect.decimal);
  source_.separator_given = options_.separator.has_value();
  missing_ = MissingMarkers(options_.missing, found->dialect.decimal);
  const bool comma_separates = found->dialect.separator == ',';
  decimal_is_open_ = found->decimal_is_open || (!found->decimal_is_sure && !at_end_ && !comma_separates);
  source_.bytes = at_end_ ? bytes.substr(0, find_table_end(bytes, found->dialect.separator)) : bytes;
  const Result<RowStart> body = read_header(source_, *mark);
  source_.bytes = {};
  if (!body) return body.error();
  next_line_ = body->line;
  next_byte_ = body->offset;
  buffer_.erase(buffer_.begin(), buffer_.begin() + static_cast<std::ptrdiff_t>(body->offset));
  return {};
}

/// Where the next block ends; 0 when no row is left. Blank lines wait for what follows them: at the end of the text
/// they are no rows, before it they are a fault.
Result<std::size_t> RowStream::find_cut() {
  for (std::size_t wanted = block_bytes_;; wanted *= 2) {
    if (Status status = fill(wanted); !status) return status.error();
    const std::string_view bytes(buffer_.data(), buffer_.size());
    // Only so much as a block takes: what the dialect was judged by may be more.
    const std::string_view stretch = bytes.substr(0, std::max(wanted, block_bytes_));
    const bool is_rest = at_end_ && stretch.size() == bytes.size();
    const std::size_t rows = is_rest ? bytes.size() : end_of_rows(stretch);
    const std::size_t cut = find_table_end(bytes.substr(0, rows), source_.syntax.separator());
    const std::string_view empty = source_.syntax.separator() == '\t' ? " \r\n" : " \t\r\n";
    const bool has_content = bytes.substr(0, cut).find_first_not_of(empty) != bytes.npos;
    if (is_rest) return has_content ? cut : 0;
    if (has_content) return cut;
    if (rows == 0 && stretch.size() > kLongestRow)
      return Error{ErrorKind::data, "a row is longer than 64 MB; a quoted cell is probably never closed",
                   source_.name + ", line " + std::to_string(next_line_),
                   "Add the closing double quote; a double quote inside a quoted cell is written twice (\"\")"};
  }
}

RowBlock RowStream::cut_block(std::size_t end) {
  RowBlock block;
  const auto middle = buffer_.begin() + static_cast<std::ptrdiff_t>(end);
  std::vector<char> rest(middle, buffer_.end());
  buffer_.resize(end);
  block.bytes = std::exchange(buffer_, std::move(rest));
  const Census census = take_census(block.view(), 0, 0, end);
  block.n_rows = census.row_ends[0] + (block.bytes.back() == '\n' && !census.odd_quotes ? 0 : 1);
  block.fault = census.fault;
  block.first_row = next_row_;
  block.first_line = next_line_;
  block.bytes_before = next_byte_;
  next_row_ += block.n_rows;
  next_line_ += census.line_feeds;
  next_byte_ += end;
  return block;
}

Result<std::optional<RowBlock>> RowStream::next() {
  const Result<std::size_t> cut = find_cut();
  if (!cut) return cut.error();
  if (*cut > 0) return std::optional<RowBlock>(cut_block(*cut));
  if (next_row_ > 0) return std::optional<RowBlock>();
  return Error{ErrorKind::data, "the file holds names of columns but no rows", source_.name + ", line 1",
               "Add at least one row of values below the names"};
}

/// The first cell of a column of numbers that may have a decimal or a thousands mark.
std::optional<Error> RowStream::open_mark_error(const Source& source, std::span<const ColumnSink> sinks,
                                                RowStart row) const {
  const char* const begin = source.bytes.data();
  const char* const end = begin + source.bytes.size();
  const char mark = source.syntax.decimal();
  std::string scratch;
  std::size_t column = 0;
  for (const char* p = begin; p != end;) {
    const RawCell cell = scan_cell(p, end, source.syntax);
    const std::string_view content = cell_text(cell, source.syntax, scratch).text;
    for (const char either : {mark, mark == '.' ? ',' : '.'})
      if (sinks[column].read_as == ReadAs::number && has_one_group_of_three(content, either)) {
        row.line += static_cast<std::uint64_t>(std::count(begin, begin + row.offset, '\n'));
        return Error{ErrorKind::data,
                     show(content) + " may have a decimal or a thousands mark, and no number before it tells which",
                     place_of(source, row, column),
                     "Say which mark is the decimal mark: --decimal point or --decimal comma; numbers are written "
                     "without thousands marks"};
      }
    const bool ends_row = cell.stop == end || *cell.stop == '\n';
    p = cell.stop == end ? end : cell.stop + 1;
    column = ends_row ? 0 : column + 1;
    if (ends_row) row.offset = static_cast<std::size_t>(p - begin);
  }
  return std::nullopt;
}

Result<BlockReading> RowStream::read(const RowBlock& block, std::span<const ColumnSink> sinks) const {
  Source source = source_;
  source.bytes = block.view();
  source.bytes_before = block.bytes_before;
  const RowStart start{0, block.first_line};
  // Sinks hold this block alone, so rows are counted from its first.
  const ReadingTask task{source, missing_, sinks, nullptr};
  BlockReading reading = read_block(task, {0, block.bytes.size(), 0, block.first_line});
  std::optional<Fault> fault = reading.fault;
  if (block.fault) {
    const Position position = locate(source, start, block.fault->offset);
    keep_earliest(fault, {block.fault->kind, position.row.offset, block.fault->offset});
  }
  const std::optional<Stray> stray = earliest_stray(reading, sinks);
  RowBlock from_zero;
  from_zero.first_line = block.first_line;
  const RowStart stray_row = stray ? start_of(source, from_zero, stray->row) : RowStart{};
  if (fault && (!stray || fault->row_begin <= stray_row.offset))
    return describe_fault(source, *fault, locate(source, start, fault->offset));
  if (stray)
    return describe_stray_cell(stray->cell, place_of(source, stray_row, stray->column), source.syntax.decimal(),
                               options_.missing);
  if (decimal_is_open_)
    if (auto error = open_mark_error(source, sinks, start)) return *std::move(error);
  return reading;
}

}  // namespace formsieve::table

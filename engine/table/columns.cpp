#include "table/columns.hpp"

#include "base/parallel.hpp"
#include "table/block_reader.hpp"
#include "table/large_pages.hpp"
#include "table/number.hpp"
#include "table/sample.hpp"

#include <algorithm>

namespace formsieve::table {

namespace {

/// Gives an empty vector n elements.
template <class T>
void allocate(std::vector<T>& values, std::size_t n) {
  values.reserve(n);
  prefer_large_pages(values.data(), n * sizeof(T));
  values.resize(n);
}

/// Allocates the columns, in parallel since filling fresh memory takes a noticeable share of the reading.
RawColumns allocate_columns(std::span<const ReadAs> read_as, std::size_t n_rows, bool with_lines, unsigned threads) {
  RawColumns raw;
  raw.columns.resize(read_as.size());
  base::parallel_for(read_as.size() + 1, threads, [&](std::size_t i) {
    if (i == read_as.size()) {
      if (with_lines) allocate(raw.line_of_row, n_rows);
      return;
    }
    RawColumn& column = raw.columns[i];
    column.read_as = read_as[i];
    if (read_as[i] == ReadAs::number) allocate(column.numbers, n_rows);
    if (read_as[i] == ReadAs::text) allocate(column.codes, n_rows);
  });
  return raw;
}

/// Joins the blocks' texts of one column in block order, which is order of first appearance, and renumbers its codes.
void join_column(RawColumn& column, std::size_t index, std::vector<BlockReading>& readings, const Layout& layout) {
  std::vector<std::uint32_t> new_code;
  for (std::size_t b = 0; b < readings.size(); ++b) {
    const BlockColumn& part = readings[b].columns[index];
    column.n_missing += part.n_missing;
    new_code.clear();
    for (const LevelIndex::Level& level : part.texts.levels()) new_code.push_back(column.texts.merge(level));
    if (column.read_as != ReadAs::text) continue;
    const std::size_t last = b + 1 < readings.size() ? layout.blocks[b + 1].first_row : layout.n_rows;
    for (std::size_t row = layout.blocks[b].first_row; row < last; ++row) {
      std::uint32_t& code = column.codes[row];
      if (code != kMissingLevel) code = new_code[code];
    }
  }
}

}  // namespace

std::vector<ReadAs> guess_reading(const Source& source, RowStart body, const MissingMarkers& missing,
                                  std::span<const std::string> text_columns) {
  std::vector<ReadAs> read_as;
  for (const std::string& name : source.header) {
    const bool is_declared = std::find(text_columns.begin(), text_columns.end(), name) != text_columns.end();
    read_as.push_back(is_declared ? ReadAs::text : ReadAs::number);
  }
  for (const std::string_view row : sample_rows(source.bytes.substr(body.offset))) {
    const std::vector<std::string> cells = split_row(row, source.syntax);
    for (std::size_t column = 0; column < std::min(cells.size(), read_as.size()); ++column) {
      const std::string_view cell = source.syntax.trim(cells[column]);
      if (!missing.contains(cell) && !parse_number(cell, source.syntax.decimal())) read_as[column] = ReadAs::text;
    }
  }
  return read_as;
}

RawColumns read_columns(const Source& source, const Layout& layout, const MissingMarkers& missing,
                        std::span<const ReadAs> read_as, bool with_lines, unsigned threads,
                        const std::function<void()>& alongside) {
  RawColumns raw = allocate_columns(read_as, layout.n_rows, with_lines, threads);
  std::vector<ColumnSink> sinks;
  for (RawColumn& column : raw.columns) sinks.push_back({column.read_as, column.numbers.data(), column.codes.data()});
  const ReadingTask task{source, missing, sinks, with_lines ? raw.line_of_row.data() : nullptr};

  std::vector<BlockReading> readings(layout.blocks.size());
  base::parallel_for(readings.size() + 1, threads, [&](std::size_t i) {
    if (i == 0) {
      if (alongside) alongside();
    } else {
      readings[i - 1] = read_block(task, layout.blocks[i - 1]);
    }
  });

  for (const BlockReading& reading : readings)
    if (reading.fault) keep_earliest(raw.fault, *reading.fault);
  base::parallel_for(raw.columns.size(), threads,
                     [&](std::size_t column) { join_column(raw.columns[column], column, readings, layout); });
  for (BlockReading& reading : readings)
    for (BlockColumn& column : reading.columns)
      if (!column.texts.empty()) raw.block_texts.push_back(std::move(column.texts));
  return raw;
}

}  // namespace formsieve::table

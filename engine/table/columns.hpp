// Turning the rows of a delimited text into columns, block by block in parallel.
#pragma once

#include "table/blocks.hpp"
#include "table/levels.hpp"
#include "table/missing.hpp"

#include <formsieve/table.hpp>

#include <cstddef>
#include <cstdint>
#include <functional>
#include <optional>
#include <span>
#include <string>
#include <vector>

namespace formsieve::table {

/// What the cells of a column are read as.
enum class ReadAs : std::uint8_t {
  number,   ///< numbers go to their rows; texts are only counted
  text,     ///< every value becomes a level
  written,  ///< kept as it stands in the file, without a look at what it means
  nothing,
};

/// A column while it is being read.
struct RawColumn {
  ReadAs read_as = ReadAs::number;
  std::vector<double> numbers;       ///< [n_rows] when read as numbers; NaN for missing cells and texts
  std::vector<std::uint32_t> codes;  ///< [n_rows] when read as text; kMissingLevel for missing cells
  LevelIndex texts;                  ///< read as numbers: the values that are none; read as text: all values
  std::size_t n_missing = 0;
};

struct RawColumns {
  std::vector<RawColumn> columns;
  std::vector<std::uint64_t> line_of_row;  ///< [n_rows], empty when not asked for
  std::optional<Fault> fault;              ///< earliest of quotes and row widths; cells at fault count as missing
  std::vector<LevelIndex> block_texts;     ///< keeps alive what `texts` views
};

/// What each column of the file is best read as, judged by its first rows: as text when one of them holds a text or the
/// column is declared as text. Only a guess, to save a second reading.
std::vector<ReadAs> guess_reading(const Source& source, RowStart body, const MissingMarkers& missing,
                                  std::span<const std::string> text_columns);

/// Reads the columns as told. `alongside` runs once beside the blocks, on one of the threads. Rows of a wrong width are
/// read as far as they go. The result does not depend on the number of threads. Cost: O(bytes).
RawColumns read_columns(const Source& source, const Layout& layout, const MissingMarkers& missing,
                        std::span<const ReadAs> read_as, bool with_lines, unsigned threads,
                        const std::function<void()>& alongside);

}  // namespace formsieve::table

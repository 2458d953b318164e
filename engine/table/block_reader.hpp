// Reads the rows of one block into columns.
#pragma once

#include "table/columns.hpp"

#include <cstddef>
#include <cstdint>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

namespace formsieve::table {

/// Where a column's cells go: pointers to its first row, null when it is not read that way.
struct ColumnSink {
  ReadAs read_as;
  double* numbers;
  std::uint32_t* codes;
  std::string_view* cells = nullptr;  ///< as written: may stay null, then only the quotes are looked at
};

/// What a block keeps of a column by itself.
struct BlockColumn {
  LevelIndex texts;
  std::size_t n_missing = 0;
};

struct BlockReading {
  std::vector<BlockColumn> columns;
  std::optional<Fault> fault;  ///< earliest in the block
};

/// What is the same for all blocks.
struct ReadingTask {
  const Source& source;
  const MissingMarkers& missing;
  std::span<const ColumnSink> sinks;
  std::uint64_t* line_of_row;  ///< null when not wanted
};

/// Reads the rows of `block` into the sinks, each at its row; level codes are those of the block's own texts.
BlockReading read_block(const ReadingTask& task, const Block& block);

}  // namespace formsieve::table

// Cutting a file into blocks that start at row ends, however its quotes lie, with the faults of its bytes found on the
// way.
#pragma once

#include "table/faults.hpp"

#include <cstddef>
#include <cstdint>
#include <optional>
#include <string_view>
#include <vector>

namespace formsieve::table {

/// Bytes of a block. Fixed, so that no result depends on the number of threads; large enough that the cost of starting
/// a block vanishes, small enough that a few hundred of them share 200 MB evenly.
inline constexpr std::size_t kBlockBytes = std::size_t{1} << 20;

/// Whole rows, as offsets into the file.
struct Block {
  std::size_t begin;
  std::size_t end;
  std::size_t first_row;  ///< index of the first row in it, from 0 after the header
  std::uint64_t first_line;
};

struct Layout {
  std::vector<Block> blocks;
  std::size_t n_rows = 0;
  std::optional<Fault> byte_fault;  ///< earliest NUL byte or invalid UTF-8

  /// The last known row start at or before a byte of the body, or at or before a row.
  RowStart start_before(std::size_t offset) const;
  /// Offset and line of the row with this index. Cost: O(bytes of its block).
  RowStart start_of_row(std::string_view bytes, std::size_t row) const;
};

/// The earliest NUL byte or ill-formed UTF-8 sequence that starts in bytes [begin, end).
struct ByteFault {
  FaultKind kind;
  std::size_t offset;
};
std::optional<ByteFault> find_byte_fault(std::string_view bytes, std::size_t begin, std::size_t end);

/// Lays out the rows in bytes [body.offset, end) of `source`, where `body` is the first row after the header. Two
/// steps: every raw block is censused in parallel (quotes, line feeds inside and outside of quotes for both states it
/// may be entered in, bytes that are no UTF-8), then the states are carried through in order and each cut moves to the
/// next row end. Cost: O(bytes), some GB/s.
Layout lay_out(const Source& source, RowStart body, std::size_t end, std::size_t block_bytes, unsigned threads);

}  // namespace formsieve::table

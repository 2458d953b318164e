// One pass over the bytes of a raw block, before it is known whether it starts inside quotes.
#pragma once

#include "table/blocks.hpp"

#include <array>
#include <cstddef>
#include <cstdint>
#include <optional>
#include <string_view>

namespace formsieve::table {

struct Census {
  std::uint64_t line_feeds = 0;
  std::array<std::size_t, 2> row_ends = {};  ///< line feeds outside quotes when entered outside [0] or inside [1]
  bool odd_quotes = false;
  std::optional<ByteFault> fault;  ///< earliest in the block
};

/// Counts bytes [begin, end) of `bytes`, a raw block of a text that starts at `text_begin`. UTF-8 sequences belong to
/// the block in which they start. Cost: O(end − begin).
Census take_census(std::string_view bytes, std::size_t text_begin, std::size_t begin, std::size_t end);

}  // namespace formsieve::table

#include "table/census.hpp"

#include "table/encoding.hpp"

#include <algorithm>

namespace formsieve::table {

namespace {

/// Bytes that are counted before their counts are looked at: fits the smallest cache, and 16-bit counters.
constexpr std::size_t kTileBytes = 4096;

struct TileCounts {
  unsigned line_feeds = 0;
  unsigned quotes = 0;
  unsigned nuls = 0;
  bool has_high_bytes = false;
};

/// Plain counting loops that compilers turn into vector code.
TileCounts count_tile(const char* tile, std::size_t size) {
  // Eight-bit counters keep the vectors narrow; 128 steps cannot overflow them.
  constexpr std::size_t kStep = 128;
  TileCounts counts;
  unsigned char high = 0;
  for (std::size_t at = 0; at < size; at += kStep) {
    const std::size_t stop = std::min(size, at + kStep);
    unsigned char line_feeds = 0;
    unsigned char quotes = 0;
    unsigned char nuls = 0;
    for (std::size_t i = at; i < stop; ++i) {
      const char c = tile[i];
      line_feeds = static_cast<unsigned char>(line_feeds + (c == '\n'));
      quotes = static_cast<unsigned char>(quotes + (c == '"'));
      nuls = static_cast<unsigned char>(nuls + (c == '\0'));
      high = static_cast<unsigned char>(high | static_cast<unsigned char>(c));
    }
    counts.line_feeds += line_feeds;
    counts.quotes += quotes;
    counts.nuls += nuls;
  }
  counts.has_high_bytes = high >= 0x80;
  return counts;
}

/// Line feeds of a tile before which an odd number of its quotes stand.
std::size_t line_feeds_after_odd_quotes(std::string_view tile) {
  unsigned odd = 0;
  std::size_t n = 0;
  for (const char c : tile) {
    odd ^= static_cast<unsigned>(c == '"');
    n += static_cast<unsigned>(c == '\n') & odd;
  }
  return n;
}

/// Follows UTF-8 sequences through a block, tile by tile.
class Utf8Walk {
 public:
  Utf8Walk(std::string_view bytes, std::size_t text_begin, std::size_t begin)
      : bytes_(bytes), text_begin_(text_begin), at_(skip_continuation(begin)) {}

  /// Position of the first ill-formed sequence that starts before `end`, if any; tiles without high bytes may be left
  /// out.
  std::optional<std::size_t> check(std::size_t tile_begin, std::size_t end) {
    at_ = std::max(at_, tile_begin);
    while (at_ < end) {
      const std::size_t length = utf8_length(bytes_, at_);
      if (length == 0) return at_;
      at_ += length;
    }
    return std::nullopt;
  }

  /// At a block's end: continuation bytes that the next block leaves to this one, but no sequence of it covers.
  std::optional<std::size_t> check_remainder(std::size_t end) const {
    const std::size_t at = std::max(at_, end);
    if (at < skip_continuation(end)) return at;
    return std::nullopt;
  }

 private:
  /// A block leaves up to three continuation bytes at its start to the sequence that began before it.
  std::size_t skip_continuation(std::size_t begin) const {
    std::size_t at = begin;
    while (begin > text_begin_ && at < bytes_.size() && at < begin + 3 && is_utf8_continuation(bytes_[at])) ++at;
    return at;
  }

  std::string_view bytes_;
  std::size_t text_begin_;
  std::size_t at_;
};

std::optional<ByteFault> check_tile(std::string_view bytes, std::size_t begin, std::size_t end,
                                    const TileCounts& counts, Utf8Walk& utf8) {
  std::optional<ByteFault> fault;
  if (counts.nuls > 0) fault = ByteFault{FaultKind::nul_byte, bytes.find('\0', begin)};
  if (!counts.has_high_bytes) return fault;
  const std::optional<std::size_t> broken = utf8.check(begin, end);
  if (broken && (!fault || *broken < fault->offset)) fault = ByteFault{FaultKind::invalid_utf8, *broken};
  return fault;
}

}  // namespace

Census take_census(std::string_view bytes, std::size_t text_begin, std::size_t begin, std::size_t end) {
  Census census;
  Utf8Walk utf8(bytes, text_begin, begin);
  for (std::size_t at = begin; at < end; at += kTileBytes) {
    const std::string_view tile = bytes.substr(at, std::min(kTileBytes, end - at));
    const TileCounts counts = count_tile(tile.data(), tile.size());
    const std::size_t after_odd = counts.quotes == 0 ? 0 : line_feeds_after_odd_quotes(tile);
    // Entered outside quotes, the block is inside them at this tile's start when an odd number of quotes came before.
    census.row_ends[census.odd_quotes ? 1 : 0] += counts.line_feeds - after_odd;
    census.row_ends[census.odd_quotes ? 0 : 1] += after_odd;
    census.line_feeds += counts.line_feeds;
    census.odd_quotes = census.odd_quotes != (counts.quotes % 2 == 1);
    if (!census.fault) census.fault = check_tile(bytes, at, at + tile.size(), counts, utf8);
  }
  if (const auto broken = utf8.check_remainder(end); broken && !census.fault)
    census.fault = ByteFault{FaultKind::invalid_utf8, *broken};
  return census;
}

std::optional<ByteFault> find_byte_fault(std::string_view bytes, std::size_t begin, std::size_t end) {
  return take_census(bytes, begin, begin, end).fault;
}

}  // namespace formsieve::table

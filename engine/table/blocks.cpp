#include "table/blocks.hpp"

#include "base/parallel.hpp"
#include "table/census.hpp"

#include <algorithm>

namespace formsieve::table {

namespace {

/// Where a raw block starts counting: what all blocks before it add up to.
struct Entry {
  bool inside = false;  ///< of quotes
  std::size_t row_ends = 0;
  std::uint64_t line_feeds = 0;
};

/// First byte after the first row end at or behind `at`, which lies inside quotes or not; `end` when there is none.
std::size_t next_row(std::string_view bytes, std::size_t at, std::size_t end, bool inside) {
  if (inside) {
    const std::size_t quote = bytes.substr(0, end).find('"', at);
    if (quote == bytes.npos) return end;
    at = quote + 1;
  }
  return static_cast<std::size_t>(row_end(bytes.data() + at, bytes.data() + end) - bytes.data());
}

std::size_t count_line_feeds(std::string_view text) {
  return static_cast<std::size_t>(std::count(text.begin(), text.end(), '\n'));
}

std::vector<Census> take_censuses(std::string_view bytes, std::size_t begin, std::size_t end, std::size_t block_bytes,
                                  unsigned threads) {
  std::vector<Census> censuses((end - begin + block_bytes - 1) / block_bytes);
  base::parallel_for(censuses.size(), threads, [&](std::size_t i) {
    const std::size_t block_begin = begin + i * block_bytes;
    censuses[i] = take_census(bytes.substr(0, end), begin, block_begin, std::min(block_begin + block_bytes, end));
  });
  return censuses;
}

/// The state and counts at the start of every raw block, and after the last.
std::vector<Entry> carry_through(const std::vector<Census>& censuses) {
  std::vector<Entry> entries(censuses.size() + 1);
  for (std::size_t i = 0; i < censuses.size(); ++i) {
    const Entry& before = entries[i];
    entries[i + 1] = {before.inside != censuses[i].odd_quotes,
                      before.row_ends + censuses[i].row_ends[before.inside ? 1 : 0],
                      before.line_feeds + censuses[i].line_feeds};
  }
  return entries;
}

std::optional<Fault> earliest_byte_fault(const Source& source, const std::vector<Census>& censuses,
                                         const Layout& layout) {
  for (const Census& census : censuses) {
    if (!census.fault) continue;
    const std::size_t offset = census.fault->offset;
    const Position position = locate(source, layout.start_before(offset), offset);
    return Fault{census.fault->kind, position.row.offset, offset};
  }
  return std::nullopt;
}

}  // namespace

RowStart Layout::start_before(std::size_t offset) const {
  auto block = std::upper_bound(blocks.begin(), blocks.end(), offset,
                                [](std::size_t at, const Block& candidate) { return at < candidate.begin; });
  --block;
  return {block->begin, block->first_line};
}

RowStart Layout::start_of_row(std::string_view bytes, std::size_t row) const {
  auto block = std::upper_bound(blocks.begin(), blocks.end(), row,
                                [](std::size_t at, const Block& candidate) { return at < candidate.first_row; });
  --block;
  RowStart start{block->begin, block->first_line};
  for (std::size_t i = block->first_row; i < row; ++i) {
    const std::size_t next = next_row(bytes, start.offset, block->end, false);
    start.line += count_line_feeds(bytes.substr(start.offset, next - start.offset));
    start.offset = next;
  }
  return start;
}

Layout lay_out(const Source& source, RowStart body, std::size_t end, std::size_t block_bytes, unsigned threads) {
  Layout layout;
  if (body.offset >= end) return layout;
  const std::string_view bytes = source.bytes;
  const std::vector<Census> censuses = take_censuses(bytes, body.offset, end, block_bytes, threads);
  const std::vector<Entry> entries = carry_through(censuses);
  const bool last_row_ended = bytes[end - 1] == '\n' && !entries.back().inside;
  layout.n_rows = entries.back().row_ends + (last_row_ended ? 0 : 1);

  layout.blocks.push_back({body.offset, end, 0, body.line});
  for (std::size_t i = 1; i < censuses.size(); ++i) {
    const std::size_t raw = body.offset + i * block_bytes;
    if (layout.blocks.back().begin > raw) continue;  // one row covers this whole raw block
    const std::size_t cut = next_row(bytes, raw, end, entries[i].inside);
    if (cut == end) break;
    layout.blocks.back().end = cut;
    const std::uint64_t line = body.line + entries[i].line_feeds + count_line_feeds(bytes.substr(raw, cut - raw));
    layout.blocks.push_back({cut, end, entries[i].row_ends + 1, line});
  }
  layout.byte_fault = earliest_byte_fault(source, censuses, layout);
  return layout;
}

}  // namespace formsieve::table

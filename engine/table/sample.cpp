#include "table/sample.hpp"

#include "table/number.hpp"

namespace formsieve::table {

namespace {

/// Rows and bytes that a sample stops at: a dialect shows in far fewer rows, and a megabyte is read in milliseconds.
constexpr std::size_t kSampleRows = 1000;
constexpr std::size_t kSampleBytes = std::size_t{1} << 20;

MarkCounts count_mark(std::string_view cell, char mark) {
  MarkCounts counts;
  if (cell.find(mark) == cell.npos || !parse_number(cell, mark)) return counts;
  (has_one_group_of_three(cell, mark) ? counts.open : counts.sure) = 1;
  return counts;
}

}  // namespace

std::vector<std::string_view> sample_rows(std::string_view text) {
  std::vector<std::string_view> rows;
  const char* const begin = text.data();
  const char* const end = begin + text.size();
  for (const char* p = begin; p != end;) {
    const bool is_enough = rows.size() >= kSampleRows || static_cast<std::size_t>(p - begin) >= kSampleBytes;
    if (is_enough && rows.size() >= 2) break;
    const char* const next = row_end(p, end);
    const std::string_view row(p, static_cast<std::size_t>(next - p));
    if (row.find_first_not_of(" \r\n") != row.npos) rows.push_back(row);
    p = next;
  }
  return rows;
}

std::vector<std::string> split_row(std::string_view row, const Syntax& syntax) {
  std::vector<std::string> cells;
  std::string scratch;
  const char* const end = row.data() + row.size();
  for (const char* p = row.data();;) {
    const RawCell cell = scan_cell(p, end, syntax);
    cells.emplace_back(cell_text(cell, syntax, scratch).text);
    if (cell.stop == end || *cell.stop == '\n') return cells;
    p = cell.stop + 1;
  }
}

MarkEvidence mark_evidence(std::string_view cell, char separator) {
  MarkEvidence evidence{count_mark(cell, '.'), count_mark(cell, ',')};
  if (separator == ',') evidence.point = {evidence.point.sure + evidence.point.open, 0};
  return evidence;
}

}  // namespace formsieve::table

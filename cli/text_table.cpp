#include "text_table.hpp"

#include "wrapping.hpp"

#include <algorithm>
#include <cassert>
#include <numeric>

namespace formsieve::cli {
namespace {

constexpr std::size_t kGap = 2;  // two spaces tell columns of figures apart without rules
// The key may take this share of the line (one in so many) before long names are wrapped, but never fewer columns than
// `kNarrowestKey`.
constexpr std::size_t kKeyShare = 3;
constexpr std::size_t kNarrowestKey = 12;

std::string without_trailing_spaces(std::string line) {
  line.erase(line.find_last_not_of(' ') + 1);
  return line;
}

}  // namespace

void TextTable::add_row(std::vector<Cell> cells, Cell below) {
  assert(cells.size() == columns_.size());
  for (Cell& cell : cells) cell.text = printable(cell.text);
  rows_.push_back({std::move(cells), std::move(below)});
}

std::size_t TextTable::natural(std::size_t column) const {
  std::size_t width = display_width(columns_[column].heading);
  for (const Row& row : rows_) width = std::max(width, display_width(row.cells[column].text));
  return width;
}

std::size_t TextTable::smallest(std::size_t column) const {
  const std::size_t full = natural(column);
  const TableColumn& one = columns_[column];
  return one.least > 0 ? std::min(full, std::max(one.least, display_width(one.heading))) : full;
}

std::size_t TextTable::key_width(std::size_t width) const {
  return std::min(natural(0), std::max(kNarrowestKey, width / kKeyShare));
}

std::size_t TextTable::natural_width() const {
  std::size_t width = kGap * (columns_.size() - 1);
  for (std::size_t column = 0; column < columns_.size(); ++column) width += natural(column);
  return width;
}

// Columns of each band, the key first. A group that fits into a band by itself is not torn apart.
std::vector<std::vector<std::size_t>> TextTable::bands(std::size_t width) const {
  std::vector<std::vector<std::size_t>> result{{0}};
  std::size_t used = key_width(width);
  const auto start_band = [&] {
    if (result.back().size() == 1) return;
    result.push_back({0});
    used = key_width(width);
  };
  for (std::size_t first = 1; first < columns_.size();) {
    std::size_t last = first, group_width = 0;
    for (; last < columns_.size() && columns_[last].group == columns_[first].group; ++last) {
      group_width += kGap + smallest(last);
    }
    if (used + group_width > width) start_band();
    for (; first < last; ++first) {
      const std::size_t needed = kGap + smallest(first);
      if (used + needed > width) start_band();
      result.back().push_back(first);
      used += needed;
    }
  }
  return result;
}

// Widths within one band: wrapped columns share what is left, none more than it needs.
TextTable::Band TextTable::placed(const std::vector<std::size_t>& columns, std::size_t width) const {
  Band band;
  std::size_t used = kGap * (columns.size() - 1);
  for (const std::size_t column : columns) {
    band.push_back({column, column == 0 ? key_width(width) : smallest(column)});
    used += band.back().width;
  }
  for (Placed& place : band) {
    if (place.column == 0 || columns_[place.column].least == 0 || used >= width) continue;
    const std::size_t more = std::min(width - used, natural(place.column) - place.width);
    place.width += more;
    used += more;
  }
  return band;
}

std::string TextTable::headings(const Band& band, bool colour) const {
  std::string line;
  std::size_t ruled = 0;
  for (const Placed& place : band) {
    const TableColumn& column = columns_[place.column];
    if (!line.empty()) line += std::string(kGap, ' ');
    line += column.right ? padded_left(column.heading, place.width) : padded_right(column.heading, place.width);
    ruled += place.width;
  }
  ruled += kGap * (band.size() - 1);
  std::string rule;
  for (std::size_t i = 0; i < ruled; ++i) rule += "─";
  return paint(without_trailing_spaces(line), Tone::strong, colour) + "\n" + paint(rule, Tone::quiet, colour) + "\n";
}

std::string TextTable::drawn_row(const Row& row, const Band& band, bool colour) const {
  std::vector<std::vector<std::string>> lines_of;
  std::size_t height = 1;
  for (const Placed& place : band) {
    const std::string& text = row.cells[place.column].text;
    const bool sum = columns_[place.column].sum;
    lines_of.push_back(sum ? wrapped_equation(text, place.width) : wrapped(text, place.width));
    height = std::max(height, lines_of.back().size());
  }
  std::string drawn;
  for (std::size_t line = 0; line < height; ++line) {
    std::string out, pending;  // spaces are written only when something follows them
    for (std::size_t i = 0; i < band.size(); ++i) {
      if (i > 0) pending += std::string(kGap, ' ');
      const std::string text = line < lines_of[i].size() ? lines_of[i][line] : std::string();
      const std::string space(band[i].width - std::min(band[i].width, display_width(text)), ' ');
      const bool right = columns_[band[i].column].right;
      if (right) pending += space;
      if (!text.empty()) {
        out += pending + paint(text, row.cells[band[i].column].tone, colour);
        pending.clear();
      }
      if (!right) pending += space;
    }
    drawn += out + "\n";
  }
  return drawn;
}

std::string TextTable::draw(std::size_t width, bool colour) const {
  std::string drawn;
  const std::size_t below_indent = key_width(width) + kGap;
  const std::string indent(below_indent, ' ');
  const std::vector<std::vector<std::size_t>> all_bands = bands(width);
  for (const std::vector<std::size_t>& columns : all_bands) {
    if (!drawn.empty()) drawn += "\n";
    const Band band = placed(columns, width);
    const bool last_band = &columns == &all_bands.back();
    drawn += headings(band, colour);
    for (const Row& row : rows_) {
      drawn += drawn_row(row, band, colour);
      if (!last_band || row.below.text.empty()) continue;
      for (const std::string& line : wrapped_equation(row.below.text, width - std::min(width - 1, below_indent))) {
        drawn += indent + paint(line, row.below.tone, colour) + "\n";
      }
    }
  }
  return drawn;
}

}  // namespace formsieve::cli

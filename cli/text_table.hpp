// A table of text that fits the screen: wide screens get one band of columns, narrower ones several bands under each
// other, each starting with the key column again. Groups of columns stay together where they can.
#pragma once

#include "terminal.hpp"

#include <cstddef>
#include <string>
#include <vector>

namespace formsieve::cli {

struct Cell {
  std::string text;
  Tone tone = Tone::plain;
};

struct TableColumn {
  std::string heading;
  bool right = false;     ///< figures stand on the right
  std::size_t least = 0;  ///< when positive, text may be wrapped to as few columns, and takes what the others leave
  std::size_t group = 0;  ///< neighbours with the same number belong together
  bool sum = false;       ///< wrapped text is a sum of terms and is broken before its signs
};

class TextTable {
 public:
  /// The first column is the key: it starts every band and may be wrapped when names are long.
  explicit TextTable(std::vector<TableColumn> columns) : columns_(std::move(columns)) {}

  /// One cell for each column; `below` is text of the whole row's width written under it (a sum of terms), may be
  /// empty.
  void add_row(std::vector<Cell> cells, Cell below = {});

  bool empty() const noexcept { return rows_.empty(); }

  /// Columns that the table takes when nothing is wrapped (text below rows not counted).
  std::size_t natural_width() const;

  /// The table as lines that end in a newline, none wider than `width` unless one figure alone is.
  std::string draw(std::size_t width, bool colour) const;

 private:
  struct Row {
    std::vector<Cell> cells;
    Cell below;
  };
  struct Placed {
    std::size_t column = 0, width = 0;
  };
  using Band = std::vector<Placed>;

  std::size_t natural(std::size_t column) const;
  std::size_t smallest(std::size_t column) const;
  std::size_t key_width(std::size_t width) const;
  std::vector<std::vector<std::size_t>> bands(std::size_t width) const;
  Band placed(const std::vector<std::size_t>& columns, std::size_t width) const;
  std::string headings(const Band& band, bool colour) const;
  std::string drawn_row(const Row& row, const Band& band, bool colour) const;

  std::vector<TableColumn> columns_;
  std::vector<Row> rows_;
};

}  // namespace formsieve::cli

// Random tables written as delimited text in many styles, with what a reader must find in them.
#pragma once

#include <formsieve/base.hpp>
#include <formsieve/table.hpp>

#include <cstddef>
#include <cstdint>
#include <random>
#include <string>
#include <vector>

namespace formsieve::table::test {

struct RandomColumn {
  std::string name;
  bool is_text = false;
  std::vector<bool> is_missing;
  std::vector<double> numbers;     ///< of a numeric column
  std::vector<std::string> texts;  ///< of a text column
};

struct RandomText {
  std::string text;
  char separator = ',';
  char decimal = '.';
  std::vector<RandomColumn> columns;
  std::vector<std::uint64_t> line_of_row;
};

/// A table of `n_rows` rows: separator, decimal mark, line ends, quoting, blanks, byte order mark and the content of
/// its two to six columns drawn at random; texts hold separators, quotes, line breaks and letters beyond ASCII.
RandomText random_text(std::mt19937_64& random, std::size_t n_rows);

/// Changes, inserts, deletes or repeats a few bytes of a text.
std::string damaged(std::string text, std::mt19937_64& random);

/// Everything of a table or an error as one text, numbers with all their bits: equal texts, equal results.
std::string describe(const Result<Table>& result);

}  // namespace formsieve::table::test

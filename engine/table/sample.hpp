// The first rows of a delimited text, split by each separator that it might have.
#pragma once

#include "table/cells.hpp"

#include <cstddef>
#include <string>
#include <string_view>
#include <vector>

namespace formsieve::table {

/// The first rows of `text`: at least two, then until there are enough of them or of their bytes to judge a file by.
/// Rows without content are left out. Cost: O(bytes of the sample).
std::vector<std::string_view> sample_rows(std::string_view text);

/// Contents of the cells of one row; cells with faults are empty.
std::vector<std::string> split_row(std::string_view row, const Syntax& syntax);

/// Numbers with a decimal mark, in the two ways that are in use.
struct MarkCounts {
  std::size_t sure = 0;  ///< can be read in no other way: "0.5", "12.75", "1234.567"
  std::size_t open = 0;  ///< could as well be a whole number with a thousands separator: "1.234"

  MarkCounts& operator+=(const MarkCounts& other) noexcept {
    sure += other.sure;
    open += other.open;
    return *this;
  }
};

/// Counts of numbers with a decimal point and with a decimal comma.
struct MarkEvidence {
  MarkCounts point, comma;

  MarkEvidence& operator+=(const MarkEvidence& other) noexcept {
    point += other.point;
    comma += other.comma;
    return *this;
  }
};

/// Evidence that one cell's content gives. A point in a comma-separated file is sure: whoever groups digits by points
/// writes decimal commas, and separates by semicolons.
MarkEvidence mark_evidence(std::string_view cell, char separator);

}  // namespace formsieve::table

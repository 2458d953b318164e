// Facts of invented columns, for the tests of menus and anchors.
#pragma once

#include <formsieve/forms.hpp>

#include <string>

namespace formsieve::forms::tests {

/// Facts of 200 distinct values between two numbers, with their skewness and the number of zeros and negatives.
inline ColumnFacts facts_of(double min, double max, double skewness, std::size_t n_zero = 0,
                            std::size_t n_negative = 0) {
  return {.name = "x",
          .n = 200,
          .min = min,
          .max = max,
          .n_zero = n_zero,
          .n_negative = n_negative,
          .n_distinct = 200,
          .resolution = 0.01,
          .skewness = skewness};
}

inline ColumnFacts text_facts() {
  return {.name = "site",
          .text = true,
          .n = 111,
          .n_distinct = 5,
          .levels = {"north", "south", "east", "west", "quay"},
          .level_counts = {60, 40, 6, 3, 2}};
}

}  // namespace formsieve::forms::tests

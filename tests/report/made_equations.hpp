// Made-up models with awkward names, rows to try them on, and what the library gives for these.
#pragma once

#include <formsieve/model.hpp>

#include <limits>
#include <optional>
#include <string>
#include <vector>

namespace formsieve::report::test {

/// One cell: a number or, of a column of text, a level.
struct Cell {
  double value = std::numeric_limits<double>::quiet_NaN();  ///< number, or code of the level
  std::string text;                                         ///< of a column of text
  bool missing = false;
};
using Row = std::vector<Cell>;

struct Case {
  model::ModelSet set;
  std::optional<double> factor = 1.25;
  std::vector<Row> rows;
  std::vector<double> expected, median, eta;
  const model::Model& model() const { return set.models.front(); }
};

/// One for each response form, and some with thirds or a factor of their own. Made once.
const std::vector<Case>& cases();

}  // namespace formsieve::report::test

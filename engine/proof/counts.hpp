// The largest sums of gains by number of columns: what the predictors still open can add at most.
#pragma once

#include "proof/reduced.hpp"

#include <Eigen/Core>

#include <cstddef>
#include <vector>

namespace formsieve::proof {

/// Numbers of columns, and of terms, that candidates of a node may have, all counted.
struct CountRange {
  std::size_t fewest_columns = 0, most_columns = 0;
  std::size_t fewest_terms = 0, most_terms = 0;
};

/// The gains of every form of every open predictor, as in Reduced::open.
using Gains = std::vector<std::vector<double>>;

/// sums(t, k): the largest sum of gains of t open terms with k open columns; −infinity where there is none. One row
/// alone, t not told apart, where the range of terms does not bind or terms are columns.
using Sums = Eigen::ArrayXXd;

/// A dynamic programme over the open predictors. Cost O(predictors · widths · terms · columns).
class CountedSums {
 public:
  CountedSums(const Reduced& problem, const CountRange& range);

  /// True: rows are terms.
  bool by_terms() const { return n_terms_ > 1; }
  /// Open columns and terms that candidates of the range have.
  std::size_t fewest_columns() const { return fewest_columns_; }
  std::size_t most_columns() const { return most_columns_; }
  std::size_t fewest_terms() const { return fewest_terms_; }
  std::size_t most_terms() const { return most_terms_; }

  Sums all(const Gains& gains) const;
  /// For every open predictor the sums of the others. O(log predictors) times the cost of all().
  std::vector<Sums> without_each(const Gains& gains) const;

 private:
  Sums nothing() const;
  Sums with(const Sums& sums, std::size_t predictor, const Gains& gains) const;
  void leave_out(std::size_t first, std::size_t last, const Sums& others, const Gains& gains,
                 std::vector<Sums>& result) const;
  void without_each_single(const Gains& gains, std::vector<Sums>& result) const;

  const Reduced* problem_;
  bool single_ = true;  ///< every open form has one column: terms are columns
  std::size_t n_terms_ = 1;
  std::size_t fewest_columns_ = 0, most_columns_ = 0, fewest_terms_ = 0, most_terms_ = 0;
};

}  // namespace formsieve::proof

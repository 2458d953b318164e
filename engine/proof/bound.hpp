// The bound of a node at a point of the dual (dual.hpp), and what follows from it.
#pragma once

#include "proof/certified.hpp"
#include "proof/counts.hpp"
#include "proof/problem.hpp"
#include "proof/reduced.hpp"

#include <Eigen/Core>

#include <cstddef>
#include <limits>
#include <vector>

namespace formsieve::proof {

/// Lower bounds on scores.
struct Bound {
  double lower = -std::numeric_limits<double>::infinity();  ///< of every candidate of the node
  /// Columns, all counted, of the candidates that may score at most the threshold; fewest > most: there is none.
  std::size_t fewest_columns = 0, most_columns = 0;
  /// [open predictor][its forms …, absence] of the candidates with this action and so many columns; +infinity where it
  /// is none.
  std::vector<std::vector<double>> action;
};

/// h_jf = gᵀD_ff⁻¹g of every open form, at most, and yy − vᵀZv, at least.
struct DualValue {
  Gains gains;
  double base = 0.0;
};

/// Valid for any v. Rounding: with e a bound on the errors of the entries of Z and b, u the unit roundoff and q open
/// columns, the computed g = b − Zv is off by at most e(1 + |v|₁) + (q + 2)u(max|b| + max|Z||v|₁) in every entry, and
/// vᵀZv by e|v|₁² + (2q + 4)u max|Z||v|₁² (Higham 2002, section 3.1). The gains are computed from |g| enlarged by its
/// error and the base is lowered by the other, so that what is returned holds for the exact M, b and yy.
DualValue dual_value(const Reduced& problem, const CertifiedDifference& z, const Eigen::MatrixXd& d,
                     const Eigen::VectorXd& v);

/// The smallest over the numbers of columns in range of the score at yy − vᵀZv − (largest sum of gains).
class BoundEvaluator {
 public:
  BoundEvaluator(const RootGram& root, const Reduced& problem, const CountRange& range);

  /// `lower` and the range of columns alone.
  Bound lower(const DualValue& value, double threshold) const;
  /// All of it.
  Bound operator()(const DualValue& value, double threshold) const;

 private:
  /// Open columns, those of an action included.
  struct Columns {
    std::size_t fewest, most;
  };
  double lowest(double base, const Sums& sums, Columns range, std::size_t more_terms, std::size_t more_columns) const;
  double score(double scaled_rss) const;

  const RootGram* root_;
  const Reduced* problem_;
  CountedSums counted_;
  std::vector<double> factor_;  ///< [open columns] exp((penalty − penalty of the fewest) / n)
  double reference_score_ = 0.0;
};

}  // namespace formsieve::proof

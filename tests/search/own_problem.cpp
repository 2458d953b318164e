#include "own_problem.hpp"

#include <Eigen/Core>

#include <algorithm>
#include <cmath>

namespace formsieve::test {

namespace {

using Eigen::Index;

/// The columns and, last, the response, each with mean 0 and root mean square 1.
Eigen::MatrixXd standardised(const Problem& problem, std::size_t response) {
  Eigen::MatrixXd rows(problem.columns.rows(), problem.columns.cols() + 1);
  rows << problem.columns, problem.responses.col(static_cast<Index>(response));
  for (Index c = 0; c < rows.cols(); ++c) {
    rows.col(c).array() -= rows.col(c).mean();
    const double scale = std::sqrt(rows.col(c).squaredNorm() / static_cast<double>(rows.rows()));
    if (scale > 0.0) rows.col(c) /= scale;
  }
  return rows;
}

}  // namespace

void add_own_units(const Problem& problem, std::uint64_t seed, std::size_t response, double spread,
                   base::GramSet& grams) {
  std::mt19937_64 random(seed);
  const Eigen::MatrixXd rows = standardised(problem, response);
  const Index n = rows.cols();
  base::GramSet::OwnUnits own;
  own.response = response;
  own.sse_factor = 1.5 + static_cast<double>(response);
  for (const auto& fold_of : problem.fold_of) {
    Eigen::VectorXd weight(rows.rows()), shift(rows.rows());
    for (Index i = 0; i < rows.rows(); ++i) {
      weight[i] = std::exp(spread * normal(random));
      shift[i] = 0.05 * normal(random);
    }
    const std::size_t n_folds = *std::max_element(fold_of.begin(), fold_of.end()) + std::size_t{1};
    for (std::size_t fold = 0; fold < n_folds; ++fold) {
      std::vector<Index> in, out;
      for (std::size_t i = 0; i < fold_of.size(); ++i) (fold_of[i] == fold ? out : in).push_back(static_cast<Index>(i));
      Eigen::MatrixXd held_out(static_cast<Index>(out.size()), n + 1);
      held_out.leftCols(n) = rows(out, Eigen::all).rowwise() - rows(in, Eigen::all).colwise().mean();
      held_out.col(n) = shift(out);
      const Eigen::MatrixXd gram = held_out.transpose() * weight(out).asDiagonal() * held_out;
      own.validation.emplace_back(gram.data(), gram.data() + gram.size());
    }
  }
  grams.own_units.push_back(std::move(own));
}

}  // namespace formsieve::test

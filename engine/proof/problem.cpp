#include "proof/problem.hpp"

#include <algorithm>
#include <cassert>
#include <cmath>
#include <limits>

namespace formsieve::proof {

namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();

/// One over the length of a vector of this sum of squares; 0 for a constant column, which is then never separable.
double unit_scale(double sum_of_squares) { return sum_of_squares > 0.0 ? 1.0 / std::sqrt(sum_of_squares) : 0.0; }

}  // namespace

RootGram::RootGram(const Problem& problem) : problem_(&problem) {
  const base::GramSet& set = *problem.grams;
  const auto n_columns = static_cast<Eigen::Index>(set.n_columns);
  const auto n_responses = static_cast<Eigen::Index>(set.n_responses);
  const auto order = static_cast<Eigen::Index>(set.order());
  assert(problem.constant.size() == set.n_responses);
  const Eigen::Map<const Eigen::MatrixXd> all(set.all.data(), order, order);
  const Eigen::VectorXd scale = all.diagonal().unaryExpr([](double s) { return unit_scale(s); });
  gram_ =
      scale.head(n_columns).asDiagonal() * all.topLeftCorner(n_columns, n_columns) * scale.head(n_columns).asDiagonal();
  gram_.triangularView<Eigen::StrictlyUpper>() = gram_.transpose();  // rounding may differ between the halves
  gram_.diagonal() = scale.head(n_columns).unaryExpr([](double s) { return s > 0.0 ? 1.0 : 0.0; });
  products_ = scale.head(n_columns).asDiagonal() * all.topRightCorner(n_columns, n_responses) *
              scale.tail(n_responses).asDiagonal();
  const auto n_rows = static_cast<double>(set.n_rows);
  for (Eigen::Index r = 0; r < n_responses; ++r) {
    const double own = std::max(all(n_columns + r, n_columns + r), std::numeric_limits<double>::min());
    offset_.push_back(problem.constant[static_cast<std::size_t>(r)] + n_rows * std::log(own));
  }
}

double RootGram::score(std::size_t response, double rss_rel, std::size_t n_columns) const {
  if (n_columns >= problem_->penalty.size()) return kInfinity;
  const auto n_rows = static_cast<double>(problem_->grams->n_rows);
  return n_rows * std::log(std::max(rss_rel, kExactFit_rel)) + problem_->penalty[n_columns] + offset_[response];
}

double RootGram::log_rss(std::size_t response, double score, std::size_t n_columns) const {
  if (n_columns >= problem_->penalty.size()) return -kInfinity;
  const auto n_rows = static_cast<double>(problem_->grams->n_rows);
  return (score - problem_->penalty[n_columns] - offset_[response]) / n_rows;
}

std::vector<Actions> RootGram::all_actions() const {
  std::vector<Actions> actions;
  for (const search::PredictorChoices& predictor : space().predictors) {
    assert(predictor.forms.size() <= kMostForms);
    Actions mask = predictor.always ? 0 : 1;
    for (std::size_t f = 0; f < predictor.forms.size(); ++f) mask |= Actions{2} << f;
    actions.push_back(mask);
  }
  return actions;
}

void CandidateScorer::gather(std::span<const std::uint16_t> choice) {
  columns_.clear();
  for (std::size_t j = 0; j < choice.size(); ++j) {
    if (choice[j] == 0) continue;
    const search::FormBlock& block = root_->space().predictors[j].forms[choice[j] - 1u];
    for (std::size_t c = 0; c < block.n_columns; ++c) columns_.push_back(block.first_column + c);
  }
}

CandidateScore CandidateScorer::operator()(std::size_t response, std::span<const std::uint16_t> choice) {
  gather(choice);
  const double rss = eliminate(response, search::kSmallestPivot_rel);
  if (rss == kInfinity) return {kInfinity, rss, columns_.size()};
  return {root_->score(response, rss, columns_.size()), rss, columns_.size()};
}

bool CandidateScorer::separable(std::span<const std::uint16_t> choice, double smallest_pivot_rel) {
  gather(choice);
  return eliminate(0, smallest_pivot_rel) != kInfinity;
}

double CandidateScorer::eliminate(std::size_t response, double smallest_pivot_rel) {
  const std::size_t k = columns_.size();
  const Eigen::MatrixXd& gram = root_->gram();
  // lower triangle by columns, the response as the last row
  lower_.resize((k + 1) * (k + 1));
  for (std::size_t j = 0; j < k; ++j) {
    double* column = lower_.data() + j * (k + 1);
    for (std::size_t i = j; i < k; ++i)
      column[i] = gram(static_cast<Eigen::Index>(columns_[i]), static_cast<Eigen::Index>(columns_[j]));
    column[k] = root_->products(response)(static_cast<Eigen::Index>(columns_[j]));
  }
  double rss = 1.0;
  for (std::size_t j = 0; j < k; ++j) {
    const double* pivot_column = lower_.data() + j * (k + 1);
    const double pivot = pivot_column[j];
    // the columns have unit length, so that a pivot is its share of the diagonal
    if (!(pivot > smallest_pivot_rel)) return kInfinity;
    for (std::size_t l = j + 1; l < k; ++l) {
      double* column = lower_.data() + l * (k + 1);
      const double m = pivot_column[l] / pivot;
      for (std::size_t i = l; i <= k; ++i) column[i] -= m * pivot_column[i];
    }
    rss -= pivot_column[k] / pivot * pivot_column[k];
  }
  return rss;
}

}  // namespace formsieve::proof

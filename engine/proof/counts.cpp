#include "proof/counts.hpp"

#include <algorithm>
#include <limits>
#include <numeric>

namespace formsieve::proof {

namespace {

constexpr double kNone = -std::numeric_limits<double>::infinity();

std::size_t minus(std::size_t a, std::size_t b) { return a > b ? a - b : 0; }

bool all_single(const Reduced& problem) {
  for (const OpenPredictor& predictor : problem.open)
    for (const OpenForm& form : predictor.forms)
      if (form.n_columns != 1) return false;
  return true;
}

/// Columns of all open predictors in their widest forms.
std::size_t widest(const Reduced& problem) {
  Eigen::Index columns = 0;
  for (const OpenPredictor& predictor : problem.open) {
    Eigen::Index most = 0;
    for (const OpenForm& form : predictor.forms) most = std::max(most, form.n_columns);
    columns += most;
  }
  return static_cast<std::size_t>(columns);
}

double largest(const std::vector<double>& gains) { return *std::max_element(gains.begin(), gains.end()); }

/// The gains of single columns: those that must be in summed, the others sorted.
struct SingleSums {
  std::size_t n_must = 0;
  double must = 0.0;
  std::vector<std::size_t> optional;  ///< open predictors by falling gain
  std::vector<double> prefix{0.0};    ///< prefix[m]: sum of the m largest

  SingleSums(const Reduced& problem, const Gains& gains) {
    for (std::size_t j = 0; j < problem.open.size(); ++j) {
      if (!problem.open[j].must) {
        optional.push_back(j);
        continue;
      }
      ++n_must;
      must += largest(gains[j]);
    }
    std::vector<double> top(gains.size());
    for (const std::size_t j : optional) top[j] = largest(gains[j]);
    std::stable_sort(optional.begin(), optional.end(), [&](std::size_t a, std::size_t b) { return top[a] > top[b]; });
    for (const std::size_t j : optional) prefix.push_back(prefix.back() + top[j]);
  }
};

}  // namespace

CountedSums::CountedSums(const Reduced& problem, const CountRange& range)
    : problem_(&problem),
      single_(all_single(problem)),
      fewest_columns_(minus(range.fewest_columns, problem.fixed_columns)),
      most_columns_(std::min(minus(range.most_columns, problem.fixed_columns), widest(problem))),
      fewest_terms_(minus(range.fewest_terms, problem.fixed_terms)),
      most_terms_(std::min(minus(range.most_terms, problem.fixed_terms), problem.open.size())) {
  if (single_) {
    fewest_columns_ = std::max(fewest_columns_, fewest_terms_);
    most_columns_ = std::min(most_columns_, most_terms_);
  } else if (fewest_terms_ > 0 || most_terms_ < problem.open.size()) {
    n_terms_ = most_terms_ + 1;
  }
}

Sums CountedSums::nothing() const {
  Sums sums = Sums::Constant(static_cast<Eigen::Index>(n_terms_), static_cast<Eigen::Index>(most_columns_) + 1, kNone);
  sums(0, 0) = 0.0;
  return sums;
}

Sums CountedSums::with(const Sums& sums, std::size_t predictor, const Gains& gains) const {
  const OpenPredictor& open = problem_->open[predictor];
  Sums result = open.must ? Sums(Sums::Constant(sums.rows(), sums.cols(), kNone)) : sums;
  const Eigen::Index down = by_terms() ? 1 : 0;
  for (std::size_t f = 0; f < open.forms.size(); ++f) {
    const Eigen::Index right = open.forms[f].n_columns;
    if (right >= sums.cols()) continue;
    auto target = result.bottomRightCorner(sums.rows() - down, sums.cols() - right);
    target = target.max(sums.topLeftCorner(sums.rows() - down, sums.cols() - right) + gains[predictor][f]);
  }
  return result;
}

Sums CountedSums::all(const Gains& gains) const {
  Sums sums = nothing();
  if (!single_) {
    for (std::size_t j = 0; j < gains.size(); ++j) sums = with(sums, j, gains);
    return sums;
  }
  const SingleSums single(*problem_, gains);
  sums.setConstant(kNone);
  for (std::size_t m = 0; m < single.prefix.size() && single.n_must + m <= most_columns_; ++m)
    sums(0, static_cast<Eigen::Index>(single.n_must + m)) = single.must + single.prefix[m];
  return sums;
}

void CountedSums::leave_out(std::size_t first, std::size_t last, const Sums& others, const Gains& gains,
                            std::vector<Sums>& result) const {
  if (last - first == 1) {
    result[first] = others;
    return;
  }
  const std::size_t middle = std::midpoint(first, last);
  Sums with_right = others;
  for (std::size_t j = middle; j < last; ++j) with_right = with(with_right, j, gains);
  leave_out(first, middle, with_right, gains, result);
  Sums with_left = others;
  for (std::size_t j = first; j < middle; ++j) with_left = with(with_left, j, gains);
  leave_out(middle, last, with_left, gains, result);
}

void CountedSums::without_each_single(const Gains& gains, std::vector<Sums>& result) const {
  const SingleSums single(*problem_, gains);
  const auto fill = [&](Sums& sums, std::size_t columns, double sum) {
    if (columns <= most_columns_) sums(0, static_cast<Eigen::Index>(columns)) = sum;
  };
  for (std::size_t j = 0; j < gains.size(); ++j) {
    result[j].setConstant(1, static_cast<Eigen::Index>(most_columns_) + 1, kNone);
    if (!problem_->open[j].must) continue;
    const double others = single.must - largest(gains[j]);
    for (std::size_t m = 0; m < single.prefix.size(); ++m)
      fill(result[j], single.n_must - 1 + m, others + single.prefix[m]);
  }
  for (std::size_t rank = 0; rank < single.optional.size(); ++rank) {
    const std::size_t j = single.optional[rank];
    const double own = largest(gains[j]);
    for (std::size_t m = 0; m + 1 < single.prefix.size(); ++m)
      fill(result[j], single.n_must + m, single.must + (m <= rank ? single.prefix[m] : single.prefix[m + 1] - own));
  }
}

std::vector<Sums> CountedSums::without_each(const Gains& gains) const {
  std::vector<Sums> result(gains.size());
  if (single_)
    without_each_single(gains, result);
  else if (!gains.empty())
    leave_out(0, gains.size(), nothing(), gains, result);
  return result;
}

}  // namespace formsieve::proof

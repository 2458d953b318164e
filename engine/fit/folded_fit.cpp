#include "fit/folded_fit.hpp"

#include "fit/input_check.hpp"
#include "fit/row_block_kernel.hpp"

#include <cmath>
#include <utility>

namespace formsieve::fit {

namespace {

using Eigen::Index;

/// Rows of each fold, rising.
std::vector<std::vector<Index>> rows_by_fold(std::span<const std::uint32_t> fold_of, std::size_t n_folds) {
  std::vector<std::vector<Index>> rows(n_folds);
  for (std::size_t i = 0; i < fold_of.size(); ++i) rows[fold_of[i]].push_back(static_cast<Index>(i));
  return rows;
}

Eigen::MatrixXd joined(Eigen::MatrixXd triangle, Eigen::MatrixXd other) {
  fold_in_triangle(triangle.data(), other.data(), static_cast<std::size_t>(triangle.rows()));
  return triangle;
}

}  // namespace

FoldedFit::FoldedFit(const Eigen::Ref<const Eigen::MatrixXd>& x, const Eigen::Ref<const Eigen::VectorXd>& y,
                     const Eigen::Ref<const Eigen::VectorXd>& weights, std::span<const std::uint32_t> fold_of,
                     std::size_t n_folds)
    : n_rows_(x.rows()) {
  if (const Status input = check_input(x, y, weights); !input.ok()) {
    refused_ = input.error();
    return;
  }
  const Columns columns{x, y, weights};
  standards_ = standards_of(columns);
  for (const auto& rows : rows_by_fold(fold_of, n_folds)) {
    rows_.push_back(static_cast<Index>(rows.size()));
    of_fold_.push_back(triangle_of(columns, standards_, rows));
  }
  const Eigen::MatrixXd none = Eigen::MatrixXd::Zero(x.cols() + 1, x.cols() + 1);
  before_.assign(n_folds + 1, none);
  after_.assign(n_folds + 1, none);
  for (std::size_t g = 0; g < n_folds; ++g) before_[g + 1] = joined(before_[g], of_fold_[g]);
  for (std::size_t g = n_folds; g-- > 0;) after_[g] = joined(after_[g + 1], of_fold_[g]);
}

Result<Solution> FoldedFit::without(std::size_t fold) const {
  if (refused_) return *refused_;
  return solve(joined(before_[fold], after_[fold + 1]), n_rows_ - rows_[fold]);
}

Result<Solution> FoldedFit::all() const {
  if (refused_) return *refused_;
  return solve(before_.back(), n_rows_);
}

Result<std::vector<Solution>> FoldedFit::without_each_beside(std::size_t fold) const {
  if (refused_) return *refused_;
  const std::size_t n_folds = of_fold_.size();
  // before_ holds the folds before g without `fold` as long as g is not beyond it, after_ the folds after g likewise.
  std::vector<Eigen::MatrixXd> before(before_.begin(), before_.begin() + static_cast<std::ptrdiff_t>(fold) + 1);
  before.push_back(before.back());
  for (std::size_t g = fold + 1; g < n_folds; ++g) before.push_back(joined(before[g], of_fold_[g]));
  std::vector<Solution> solutions;
  std::vector<Eigen::MatrixXd> after(n_folds + 1);
  for (std::size_t g = n_folds + 1; g-- > fold + 1;) after[g] = after_[g];
  after[fold] = after[fold + 1];
  for (std::size_t g = fold; g-- > 0;) after[g] = joined(after[g + 1], of_fold_[g]);
  for (std::size_t g = 0; g < n_folds; ++g) {
    const Index left_out = g == fold ? rows_[fold] : rows_[fold] + rows_[g];
    auto solution = solve(joined(before[g], after[g + 1]), n_rows_ - left_out);
    if (!solution.ok()) return std::move(solution).error();
    solutions.push_back(std::move(*solution));
  }
  return solutions;
}

Result<Eigen::MatrixXd> FoldedFit::inverse_root_without(std::size_t fold) const {
  if (refused_) return *refused_;
  return inverse_root(joined(before_[fold], after_[fold + 1]), n_rows_ - rows_[fold]);
}

Result<Eigen::MatrixXd> FoldedFit::inverse_root_of_all() const {
  if (refused_) return *refused_;
  return inverse_root(before_.back(), n_rows_);
}

/// With the standardised row x·M and R their triangle, XᵀWX = M⁻ᵀRᵀR·M⁻¹, so that A = M·R⁻¹.
Result<Eigen::MatrixXd> FoldedFit::inverse_root(const Eigen::MatrixXd& triangle, Index n_rows) const {
  if (auto solution = solve(triangle, n_rows); !solution.ok()) return std::move(solution).error();
  const Index p = triangle.rows() - 1;
  Eigen::MatrixXd standardise = Eigen::MatrixXd::Identity(p, p);
  for (Index j = 1; j < p; ++j) {
    const auto& [centre, exponent] = standards_[static_cast<std::size_t>(j)];
    standardise(j, j) = std::ldexp(1.0, -exponent);
    standardise(0, j) = -std::ldexp(centre, -exponent);
  }
  const auto root = triangle.topLeftCorner(p, p).triangularView<Eigen::Upper>();
  return Eigen::MatrixXd(root.solve<Eigen::OnTheRight>(standardise));
}

Result<Solution> FoldedFit::solve(const Eigen::MatrixXd& triangle, Index n_rows) const {
  auto solution = solve_triangle(triangle, standards_, n_rows);
  if (!solution.ok()) return std::move(solution).error();
  return Solution{std::move(solution->coefficients), solution->rss};
}

}  // namespace formsieve::fit

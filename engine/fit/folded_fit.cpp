#include "fit/folded_fit.hpp"

#include "fit/input_check.hpp"
#include "fit/row_block_kernel.hpp"

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
  std::vector<Eigen::MatrixXd> of_fold;
  for (const auto& rows : rows_by_fold(fold_of, n_folds)) {
    rows_.push_back(static_cast<Index>(rows.size()));
    of_fold.push_back(triangle_of(columns, standards_, rows));
  }
  const Eigen::MatrixXd none = Eigen::MatrixXd::Zero(x.cols() + 1, x.cols() + 1);
  before_.assign(n_folds + 1, none);
  after_.assign(n_folds + 1, none);
  for (std::size_t g = 0; g < n_folds; ++g) before_[g + 1] = joined(before_[g], of_fold[g]);
  for (std::size_t g = n_folds; g-- > 0;) after_[g] = joined(after_[g + 1], of_fold[g]);
}

Result<Solution> FoldedFit::without(std::size_t fold) const {
  if (refused_) return *refused_;
  return solve(joined(before_[fold], after_[fold + 1]), n_rows_ - rows_[fold]);
}

Result<Solution> FoldedFit::all() const {
  if (refused_) return *refused_;
  return solve(before_.back(), n_rows_);
}

Result<Solution> FoldedFit::solve(const Eigen::MatrixXd& triangle, Index n_rows) const {
  auto solution = solve_triangle(triangle, standards_, n_rows);
  if (!solution.ok()) return std::move(solution).error();
  return Solution{std::move(solution->coefficients), solution->rss};
}

}  // namespace formsieve::fit

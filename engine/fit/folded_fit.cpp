#include "fit/folded_fit.hpp"

#include <Eigen/QR>

#include <cmath>
#include <limits>

namespace formsieve::fit {

namespace {

/// Relative size of a diagonal entry of R below which two columns are the same for all purposes; the screen's pivot
/// guard of 1e-8 (a squared quantity) corresponds to 1e-4 here, so that only candidates that never passed the screen
/// come near it.
constexpr double kSmallestDiagonalRel = 1e-11;

/// Rows of [x y] that lie in each fold, standardised and whitened.
std::vector<Eigen::MatrixXd> split(const Eigen::Ref<const Eigen::MatrixXd>& x,
                                   const Eigen::Ref<const Eigen::VectorXd>& y,
                                   const Eigen::Ref<const Eigen::VectorXd>& weights,
                                   std::span<const std::uint32_t> fold_of, const std::vector<Eigen::Index>& rows,
                                   const Eigen::RowVectorXd& centre, const Eigen::RowVectorXd& scale) {
  const Eigen::Index p = x.cols();
  std::vector<Eigen::MatrixXd> parts;
  parts.reserve(rows.size());
  for (const Eigen::Index count : rows) parts.emplace_back(count, p + 1);
  std::vector<Eigen::Index> next(rows.size(), 0);
  std::vector<double> root(static_cast<std::size_t>(weights.size()));
  for (std::size_t i = 0; i < root.size(); ++i) root[i] = std::sqrt(weights[static_cast<Eigen::Index>(i)]);
  for (Eigen::Index j = 0; j <= p; ++j) {
    std::fill(next.begin(), next.end(), 0);
    for (Eigen::Index i = 0; i < x.rows(); ++i) {
      const std::size_t fold = fold_of[static_cast<std::size_t>(i)];
      const double value = j < p ? (x(i, j) - centre[j]) / scale[j] : y[i];
      parts[fold](next[fold]++, j) = root.empty() ? value : value * root[static_cast<std::size_t>(i)];
    }
  }
  return parts;
}

Eigen::MatrixXd triangle_of(const Eigen::MatrixXd& part) {
  if (part.rows() <= part.cols()) return part;
  const Eigen::HouseholderQR<Eigen::MatrixXd> qr(part);
  return qr.matrixQR().topRows(part.cols()).triangularView<Eigen::Upper>();
}

}  // namespace

FoldedFit::FoldedFit(const Eigen::Ref<const Eigen::MatrixXd>& x, const Eigen::Ref<const Eigen::VectorXd>& y,
                     const Eigen::Ref<const Eigen::VectorXd>& weights, std::span<const std::uint32_t> fold_of,
                     std::size_t n_folds)
    : centre_(x.colwise().mean()), scale_(Eigen::RowVectorXd::Ones(x.cols())), rows_(n_folds, 0) {
  centre_[0] = 0.0;
  for (Eigen::Index j = 1; j < x.cols(); ++j) {
    const double spread = std::sqrt((x.col(j).array() - centre_[j]).square().mean());
    if (spread > 0.0 && std::isfinite(spread)) scale_[j] = spread;
  }
  for (const std::uint32_t fold : fold_of) ++rows_[fold];
  for (const auto& part : split(x, y, weights, fold_of, rows_, centre_, scale_)) triangle_.push_back(triangle_of(part));
}

Result<Solution> FoldedFit::without(std::size_t fold) const { return solve(fold); }

Result<Solution> FoldedFit::all() const { return solve(std::numeric_limits<std::size_t>::max()); }

Result<Solution> FoldedFit::solve(std::size_t left_out) const {
  const Eigen::Index p = centre_.size();
  Eigen::Index n_rows = 0;
  Eigen::Index n_stacked = 0;
  for (std::size_t g = 0; g < triangle_.size(); ++g) {
    if (g == left_out) continue;
    n_rows += rows_[g];
    n_stacked += triangle_[g].rows();
  }
  if (n_rows < p)
    return Error{ErrorKind::data, "a training part has fewer rows than the candidate has coefficients", "", ""};
  Eigen::MatrixXd stacked(n_stacked, p + 1);
  Eigen::Index at = 0;
  for (std::size_t g = 0; g < triangle_.size(); ++g) {
    if (g == left_out) continue;
    stacked.middleRows(at, triangle_[g].rows()) = triangle_[g];
    at += triangle_[g].rows();
  }
  Eigen::ColPivHouseholderQR<Eigen::MatrixXd> qr(stacked.leftCols(p));
  const auto diagonal = qr.matrixR().diagonal().cwiseAbs();
  if (!(diagonal[p - 1] > kSmallestDiagonalRel * diagonal[0]))
    return Error{ErrorKind::data, "columns of the candidate cannot be told apart on a training part", "", ""};
  Solution solution;
  const Eigen::VectorXd standardised = qr.solve(stacked.col(p));
  solution.rss = (stacked.col(p) - stacked.leftCols(p) * standardised).squaredNorm();
  solution.coefficients = standardised.array() / scale_.transpose().array();
  solution.coefficients[0] -= (solution.coefficients.tail(p - 1).transpose() * centre_.tail(p - 1).transpose()).value();
  return solution;
}

}  // namespace formsieve::fit

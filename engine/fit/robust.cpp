#include "fit/robust.hpp"

#include "fit/centred_factor.hpp"
#include "fit/s_estimate.hpp"

#include <cmath>
#include <optional>

namespace formsieve::fit {

namespace {

using Eigen::Index;

/// A scale below this share of that of least squares is rounding: most rows lie on one equation exactly.
constexpr double kNoScale = 1e-12;
constexpr double kHalfWeight = 0.5;

/// Estimate in orthonormal coordinates, with what is left of each row's weight.
struct Estimate {
  Eigen::VectorXd delta, weight_rel;
  double scale = 0.0;
  const char* method = "";
};

template <class Weight>
Eigen::VectorXd weights_at(const Rows& rows, const Eigen::VectorXd& delta, double scale, Weight weight) {
  Eigen::VectorXd result = (rows.e - rows.u * delta) / scale;
  for (double& one : result) one = weight(one);
  return result;
}

std::optional<Estimate> by_mm(const Rows& rows) {
  const auto start = s_estimate(rows);
  if (!start || !(start->scale > kNoScale)) return std::nullopt;
  const auto delta = bisquare_estimate(rows, start->scale, start->delta);
  if (!delta || !delta->allFinite()) return std::nullopt;
  const auto weight = [](double u) { return kEfficient.weight(u); };
  return Estimate{*delta, weights_at(rows, *delta, start->scale, weight), start->scale, "MM, bisquare"};
}

std::optional<Estimate> by_huber(const Rows& rows) {
  const auto found = huber_estimate(rows);
  if (!found || !(found->scale > kNoScale) || !found->delta.allFinite()) return std::nullopt;
  return Estimate{found->delta, weights_at(rows, found->delta, found->scale, huber_weight), found->scale, "M, Huber"};
}

Error unable(const char* why) {
  return Error{ErrorKind::data, std::string("no robust fit: ") + why, "", "judge the rows by the checks alone"};
}

}  // namespace

Result<RobustFit> robust_fit(const Eigen::Ref<const Eigen::MatrixXd>& x,
                             const Eigen::Ref<const Eigen::VectorXd>& weights, const Fit& plain) {
  const Index n = x.rows();
  if (n <= x.cols()) return unable("as many coefficients as rows");
  if (!(plain.sigma > 0.0) || !std::isfinite(plain.sigma) || !plain.residuals.allFinite())
    return unable("least squares fits exactly or not at all");
  const CentredFactor<double> factor(x, weights);
  if (factor.dependent_column() != 0) return unable("a column is a combination of others");
  Eigen::VectorXd e = plain.residuals / plain.sigma;
  if (weights.size() > 0) e.array() *= weights.array().sqrt();
  const double root_n = std::sqrt(static_cast<double>(n));
  const Eigen::MatrixXd u = factor.thin_q() * root_n;
  const Eigen::Ref<const Eigen::MatrixXd> u_view(u);
  const Eigen::Ref<const Eigen::VectorXd> e_view(e);
  const Rows rows{u_view, e_view};
  auto estimate = by_mm(rows);
  if (!estimate) estimate = by_huber(rows);
  if (!estimate) return unable("more than half of the rows lie on one equation exactly");
  RobustFit result;
  const Eigen::MatrixXd root = factor.inverse_root();
  result.coefficients = plain.coefficients + root.lazyProduct(estimate->delta * (root_n * plain.sigma));
  result.weight_rel = std::move(estimate->weight_rel);
  result.scale = estimate->scale * plain.sigma;
  result.n_downweighted = static_cast<std::size_t>((result.weight_rel.array() < kHalfWeight).count());
  result.method = estimate->method;
  return result;
}

}  // namespace formsieve::fit

#include "checks/bend.hpp"

#include <boost/math/distributions/fisher_f.hpp>

#include <algorithm>
#include <cmath>
#include <limits>

namespace formsieve::checks {

namespace {

/// A power of the curve of which less than this share of its length lies outside the design adds nothing but rounding:
/// with indicator columns only, powers lie within the design by algebra.
constexpr double kInsideDesign = 1e-8;

/// What of `x` lies outside `q` and `found`; projected twice, since once leaves ε·(length ratio) behind.
Eigen::VectorXd outside(const Eigen::Ref<const Eigen::MatrixXd>& q, const Eigen::MatrixXd& found, Eigen::VectorXd x) {
  for (int pass = 0; pass < 2; ++pass) {
    x -= q * (q.transpose() * x);
    if (found.cols() > 0) x -= found * (found.transpose() * x);
  }
  return x;
}

/// Orthonormal directions that the square and cube of the curve add to the (whitened) design: [n × 0, 1 or 2]. The
/// curve is standardised first: it lies in the design, so the space is the same and the powers stay apart.
Eigen::MatrixXd added_directions(const Workings& workings, const Eigen::Ref<const Eigen::VectorXd>& curve) {
  const Eigen::VectorXd deviation = centred(curve);
  const double sd = deviation.stableNorm() / std::sqrt(static_cast<double>(workings.n));
  Eigen::MatrixXd found(workings.n, 0);
  if (!(sd > kRoundingShare * curve.lpNorm<Eigen::Infinity>())) return found;
  const Eigen::ArrayXd standardised = deviation.array() / sd;
  for (const int exponent : {2, 3}) {
    Eigen::VectorXd power = standardised.square() * workings.root_weights.array();
    if (exponent == 3) power.array() *= standardised;
    const Eigen::VectorXd rest = outside(workings.of_the_fit().q, found, power);
    if (rest.norm() <= kInsideDesign * power.norm()) continue;
    found.conservativeResize(Eigen::NoChange, found.cols() + 1);
    found.rightCols(1) = rest.normalized();
  }
  return found;
}

/// Σw(y − ȳ)² of the whitened response.
double total_sum_of_squares(const Workings& workings, const Eigen::VectorXd& response) {
  const auto intercept = workings.of_the_fit().q.col(0);
  return (response - intercept * intercept.dot(response)).squaredNorm();
}

}  // namespace

Bend bend_along(const Workings& workings, const Eigen::Ref<const Eigen::VectorXd>& curve) {
  const Eigen::MatrixXd added = added_directions(workings, curve);
  Bend bend;
  bend.df1 = static_cast<double>(added.cols());
  bend.df2 = static_cast<double>(workings.n - workings.p) - bend.df1;
  if (!bend.tested()) return bend;
  const Eigen::VectorXd response =
      workings.root_weights.cwiseProduct(workings.subject.fitted + workings.subject.residuals);
  const Eigen::VectorXd along = added.transpose() * workings.residuals;
  const double gained = along.squaredNorm();
  const double floor = static_cast<double>(workings.n) *
                       std::pow(std::numeric_limits<double>::epsilon() * response.lpNorm<Eigen::Infinity>(), 2);
  const double rss =
      std::max((workings.residuals - added * along).squaredNorm(), floor);  // keeps F finite for an exact curve
  bend.f = (gained / bend.df1) / (rss / bend.df2);
  bend.p = boost::math::cdf(boost::math::complement(boost::math::fisher_f(bend.df1, bend.df2), bend.f));
  bend.gain_r2 = gained / total_sum_of_squares(workings, response);
  // variance with the powers over that without, (rss/df2)/((rss + gained)/(df1 + df2))
  const double left = rss / (rss + gained) * (bend.df1 + bend.df2) / bend.df2;
  bend.gain_variance = std::max(0.0, 1.0 - left);
  return bend;
}

}  // namespace formsieve::checks

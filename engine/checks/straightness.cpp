#include "checks/words.hpp"
#include "checks/workings.hpp"

#include <boost/math/distributions/fisher_f.hpp>

#include <algorithm>
#include <cmath>
#include <limits>

namespace formsieve::checks {

namespace {

/// A power of the fitted value of which less than this share of its length lies outside the design adds nothing but
/// rounding: with indicator columns only, powers lie within the design by algebra.
constexpr double kInsideDesign = 1e-8;

/// What of `x` lies outside `q`; projected twice, since once leaves ε·(length ratio) behind.
Eigen::VectorXd outside(const Eigen::Ref<const Eigen::MatrixXd>& q, Eigen::VectorXd x) {
  for (int pass = 0; pass < 2; ++pass) x -= q * (q.transpose() * x);
  return x;
}

/// Orthonormal directions that the square and cube of the fitted value add to the (whitened) design: [n × 0, 1 or 2].
/// The fitted value is standardised first: it lies in the design, so the space is the same and the powers stay apart.
Eigen::MatrixXd added_directions(const Workings& workings) {
  const Eigen::VectorXd deviation = centred(workings.subject.fitted);
  const double sd = deviation.stableNorm() / std::sqrt(static_cast<double>(workings.n));
  Eigen::MatrixXd found(workings.n, 0);
  if (!(sd > kRoundingShare * workings.subject.fitted.lpNorm<Eigen::Infinity>())) return found;
  const Eigen::ArrayXd standardised = deviation.array() / sd;
  for (const int exponent : {2, 3}) {
    const Eigen::VectorXd power = standardised.pow(exponent) * workings.root_weights.array();
    Eigen::MatrixXd taken(workings.n, workings.p + found.cols());
    taken << workings.of_the_fit().q, found;
    const Eigen::VectorXd rest = outside(taken, power);
    if (rest.norm() <= kInsideDesign * power.norm()) continue;
    found.conservativeResize(Eigen::NoChange, found.cols() + 1);
    found.rightCols(1) = rest.normalized();
  }
  return found;
}

void test_directions(const Workings& workings, const Eigen::MatrixXd& added, Check& check) {
  const double df1 = static_cast<double>(added.cols());
  const double df2 = static_cast<double>(workings.n - workings.p) - df1;
  const Eigen::VectorXd response =
      workings.root_weights.cwiseProduct(workings.subject.fitted + workings.subject.residuals);
  const Eigen::VectorXd along = added.transpose() * workings.residuals;
  const double gained = along.squaredNorm();
  const double floor = static_cast<double>(workings.n) *
                       std::pow(std::numeric_limits<double>::epsilon() * response.lpNorm<Eigen::Infinity>(), 2);
  const double rss =
      std::max((workings.residuals - added * along).squaredNorm(), floor);  // keeps F finite for an exact curve
  check.statistic = (gained / df1) / (rss / df2);
  check.df = df1;
  check.df2 = df2;
  check.p = boost::math::cdf(boost::math::complement(boost::math::fisher_f(df1, df2), *check.statistic));
  check.size = gained / outside(workings.of_the_fit().q.leftCols(1), response).squaredNorm();
  check.size_words = "letting the curve bend further would raise R² by " + number_words(check.size);
}

}  // namespace

Check straightness(const Workings& workings) {
  Check check = named("straightness", "RESET (Ramsey), squares and cubes of the fitted value",
                      "the square and cube of the fitted value add nothing to the equation");
  check.size_words = "no bend to judge";
  if (!workings.untestable.empty()) {
    check.note = workings.untestable;
  } else if (workings.p < 2) {
    check.note = "no term, so one fitted value";
  } else if (!workings.of_the_fit().full_rank) {
    check.note = "the design columns are not separable";
  } else {
    const Eigen::MatrixXd added = added_directions(workings);
    if (added.cols() == 0)
      check.note = "the design already holds every power of the fitted value";
    else if (workings.n - workings.p - added.cols() < 1)
      check.note = "too few rows for two more columns";
    else
      test_directions(workings, added, check);
  }
  return check;
}

}  // namespace formsieve::checks

#include "checks/ljung_box.hpp"

#include "checks/words.hpp"
#include "checks/workings.hpp"

#include <boost/math/distributions/chi_squared.hpp>

#include <algorithm>
#include <cmath>

namespace formsieve::checks {

namespace {

/// Lags looked at: min(10, n/5), common practice for data without seasons (Hyndman & Athanasopoulos 2018, section 2.9).
constexpr Eigen::Index kMostLags = 10;
constexpr Eigen::Index kRowsPerLag = 5;

}  // namespace

std::optional<LjungBox> ljung_box(const Eigen::Ref<const Eigen::VectorXd>& residuals, Eigen::Index lags) {
  const Eigen::Index n = residuals.size();
  if (lags < 1 || n <= lags) return std::nullopt;
  const Eigen::VectorXd deviation = centred(residuals / residuals.lpNorm<Eigen::Infinity>());
  const double total = deviation.squaredNorm();
  if (!(total > 0.0)) return std::nullopt;
  LjungBox result;
  result.df = static_cast<double>(lags);
  result.autocorrelation.resize(lags);
  const double count = static_cast<double>(n);
  for (Eigen::Index k = 1; k <= lags; ++k) {
    const double r = deviation.tail(n - k).dot(deviation.head(n - k)) / total;
    result.autocorrelation[k - 1] = r;
    result.q += count * (count + 2.0) * r * r / static_cast<double>(n - k);
  }
  result.p = boost::math::cdf(boost::math::complement(boost::math::chi_squared(result.df), result.q));
  return result;
}

Check independence_at_lags(const Workings& workings) {
  Check check =
      named("independence-at-lags", "Ljung–Box", "residuals a few rows apart in the order given are not correlated");
  check.size_words = "no residuals to judge";
  check.size2 = 0.0;
  if (!workings.untestable.empty() || !order_covers_all_rows(workings.subject)) {
    check.note = workings.untestable.empty() ? "the order does not cover every row" : workings.untestable;
    return check;
  }
  const Eigen::Index lags = std::min(kMostLags, workings.n / kRowsPerLag);
  const auto test = ljung_box(in_order(workings.residuals, workings.subject.order), lags);
  if (!test) {
    check.note = lags < 1 ? "too few rows for a lag" : "the residuals have no spread";
    return check;
  }
  check.method += lags == 1 ? ", lag 1" : ", lags 1 to " + std::to_string(lags);
  check.statistic = test->q;
  check.df = test->df;
  check.p = test->p;
  Eigen::Index at = 0;
  test->autocorrelation.cwiseAbs().maxCoeff(&at);
  check.size = test->autocorrelation[at];
  // chance alone makes Q its df on average
  check.size2 = std::sqrt(std::max(0.0, test->q - test->df) / static_cast<double>(workings.n));
  check.size_words = "largest correlation of residuals " + number_words(check.size) + ", " + std::to_string(at + 1) +
                     (at == 0 ? " row" : " rows") + " apart; over all lags " + number_words(*check.size2) +
                     " more than chance";
  note_weights(workings, check);
  return check;
}

}  // namespace formsieve::checks

#include "checks/verdict.hpp"
#include "support.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <map>

namespace formsieve::checks {

namespace {

/// Verdicts of all checks by name; only those that were reached.
std::map<std::string, Verdict> verdicts(const std::vector<Check>& checks) {
  std::map<std::string, Verdict> result;
  for (const Check& check : checks)
    if (check.verdict) result[check.name] = *check.verdict;
  return result;
}

}  // namespace

TEST_CASE("checks: every check has a line in the table of verdicts", "[checks][unit]") {
  for (const auto& name : names()) CHECK(rule_of(name).name == name);
  CHECK(rule_of("no such check").name.empty());
}

TEST_CASE("checks: a verdict follows from size and p as the table says", "[checks][unit]") {
  const Rule rule{"made", false, true, {1.0, 2.0, 3.0, 4.0}, {}};
  const double small = 0.01;
  const double large = 0.5;
  CHECK(verdict(rule, 0.9, {}, small) == Verdict::holds);
  CHECK(verdict(rule, 1.0, {}, small) == Verdict::strained);
  CHECK(verdict(rule, -1.5, {}, small) == Verdict::strained);
  CHECK(verdict(rule, 2.0, {}, small) == Verdict::broken);
  CHECK(verdict(rule, 2.9, {}, large) == Verdict::holds);
  CHECK(verdict(rule, 3.0, {}, large) == Verdict::strained);
  CHECK(verdict(rule, 4.1, {}, large) == Verdict::broken);
  CHECK(verdict(rule, 4.1, {}, std::nullopt) == Verdict::broken);
  CHECK(verdict(rule, 2.0, {}, 0.05) == Verdict::holds);  // the level itself is not below it

  const Rule ratio{"made", true, true, {1.3, 2.0, 3.0}, {}};
  CHECK(verdict(ratio, 0.5, {}, small) == Verdict::broken);
  CHECK(verdict(ratio, 1.2, {}, small) == Verdict::holds);
  CHECK(verdict(ratio, 0.7, {}, small) == Verdict::strained);

  const Rule both{"made", false, true, {1.0, 2.0, 3.0}, Limits{10.0, 20.0, 30.0}};
  CHECK(verdict(both, 0.5, 25.0, small) == Verdict::broken);
  CHECK(verdict(both, 2.5, 5.0, small) == Verdict::broken);
  CHECK(verdict(both, 0.5, 5.0, small) == Verdict::holds);
}

TEST_CASE("checks: a verdict never gets better when a size grows or p falls", "[checks][property]") {
  const std::vector<double> sizes{0.0, 0.01, 0.05, 0.1, 0.2, 0.3, 0.5, 0.9,  1.0,
                                  1.3, 1.9,  2.0,  3.0, 4.9, 5.0, 9.9, 11.0, 1e6};
  const std::vector<double> p{1.0, 0.2, 0.05, 0.0499, 1e-3, 1e-300, 0.0};
  for (const auto& name : names()) {
    INFO(name);
    const Rule& rule = rule_of(name);
    for (std::size_t i = 0; i + 1 < sizes.size(); ++i) {
      const double size = rule.ratio ? std::max(sizes[i], 1.0) : sizes[i];
      const double larger = rule.ratio ? std::max(sizes[i + 1], 1.0) : sizes[i + 1];
      for (const double size2 : sizes)
        for (const double one : p) {
          CHECK(verdict(rule, size, size2, one) <= verdict(rule, larger, size2, one));
          CHECK(verdict(rule, size2, size, one) <= verdict(rule, size2, larger, one));
        }
      for (std::size_t j = 0; j + 1 < p.size(); ++j)
        CHECK(verdict(rule, size, larger, p[j]) <= verdict(rule, size, larger, p[j + 1]));
    }
  }
}

TEST_CASE("checks: at 100,000 rows departures that do not matter hold although their p-values are small",
          "[checks][property]") {
  Normals normals(61);
  const Eigen::Index n = 100000;
  const Eigen::MatrixXd x = normals.design(n, 3);
  Eigen::VectorXd error = normals.vector(n);
  for (Eigen::Index i = 0; i < n; ++i) {
    error[i] += 0.03 * (error[i] * error[i] - 1.0);  // skewness about 0.2
    error[i] *= std::exp(0.05 * x(i, 1));            // the top third spreads about 1.1 times as widely
    if (i > 0) error[i] += 0.04 * error[i - 1];      // neighbours correlate by 0.04
  }
  const Eigen::VectorXd y = 2.0 * x.col(1) + x.col(2) + 0.03 * x.col(1).cwiseAbs2() + error;
  const auto checks = run_all(fit_by_long_double(x, y).ordered(row_order(n)));
  for (const char* name :
       {"normal-residuals", "equal-spread", "equal-spread-by-term", "equal-spread-by-thirds", "equal-spread-any-shape",
        "straightness", "straightness-by-term", "independence", "independence-at-lags"}) {
    INFO(name);
    const Check& check = check_named(checks, name);
    CHECK(check.p_adjusted.value() < 1e-3);
    CHECK(check.verdict == Verdict::holds);
    CHECK(check.passes);
  }
}

TEST_CASE("checks: at 20 rows gross departures do not hold although their p-values are not small",
          "[checks][property]") {
  Normals normals(62);
  const Eigen::Index n = 20;
  int strained = 0;
  for (int sample = 0; sample < 50; ++sample) {
    const Eigen::MatrixXd x = normals.design(n, 2);
    Eigen::VectorXd y = 3.0 * x.col(1);
    for (Eigen::Index i = 0; i < n; ++i) y[i] += std::exp(1.0 * x(i, 1)) * normals.next();
    const auto checks = run_all(fit_by_long_double(x, y).subject());
    const Check& spread = check_named(checks, "equal-spread");
    if (spread.size < 3.0) continue;
    CHECK(spread.verdict != Verdict::holds);
    if (spread.p_adjusted.value() < kLevel) continue;
    CHECK(spread.verdict == Verdict::strained);
    CHECK(spread.passes);
    CHECK_THAT(spread.note, Catch::Contains("too few to tell"));
    ++strained;
  }
  CHECK(strained > 10);
}

TEST_CASE("checks: at 20 rows of a true equation every check holds in most samples", "[checks][property]") {
  Normals normals(63);
  std::map<std::string, int> held;
  std::map<std::string, int> broken;
  constexpr int kSamples = 400;
  for (int sample = 0; sample < kSamples; ++sample) {
    const Eigen::MatrixXd x = normals.design(20, 3);
    const Eigen::VectorXd y = x.col(1) + normals.vector(20);
    for (const auto& [name, verdict] : verdicts(run_all(fit_by_long_double(x, y).ordered(row_order(20))))) {
      held[name] += verdict == Verdict::holds;
      broken[name] += verdict == Verdict::broken;
    }
  }
  for (const auto& [name, count] : held) {
    INFO(name << " holds in " << count << " of " << kSamples << ", broken in " << broken[name]);
    CHECK(count > kSamples * 7 / 10);
    CHECK(broken[name] < kSamples * 3 / 100);
  }
  CHECK(held.size() == names().size());
}

}  // namespace formsieve::checks

// The worked cases of tests/reference/cases: every figure that a check carries. Sources and versions stand in each file
// (NumPy 1.24.2, SciPy 1.10.1, statsmodels 0.13.5, mpmath); its `mp` entries are preferred where there are any.

#include "checks/anderson_darling.hpp"
#include "checks/condition.hpp"
#include "checks/deletion.hpp"
#include "checks/durbin_watson.hpp"
#include "checks/ljung_box.hpp"
#include "checks/moments.hpp"
#include "checks/separable_terms.hpp"
#include "checks/shapiro_wilk.hpp"
#include "checks/spread.hpp"
#include "checks/white.hpp"
#include "checks/workings.hpp"
#include "support.hpp"

#include <boost/math/distributions/students_t.hpp>
#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include <algorithm>
#include <cmath>
#include <filesystem>
#include <fstream>

namespace formsieve::checks {

namespace {

using nlohmann::json;

/// The case files have their own names for forms; evaluated here, not by the room forms.
double apply_form(const json& form, double x) {
  const double u = (form.contains("anchor") ? form.at("anchor").get<double>() - x : x) + form.value("shift", 0.0);
  const std::string name = form.at("form");
  if (name == "identity") return u;
  if (name == "square") return u * u;
  if (name == "cube") return u * u * u;
  if (name == "sqrt") return std::sqrt(u);
  if (name == "cbrt") return std::cbrt(u);
  if (name == "ln") return std::log(u);
  if (name == "reciprocal") return 1.0 / u;
  if (name == "rsqrt") return 1.0 / std::sqrt(u);
  if (name == "boxcox")
    return std::expm1(form.at("lambda").get<double>() * std::log(u)) / form.at("lambda").get<double>();
  throw std::runtime_error("a form that the test does not know: " + name);
}

Eigen::VectorXd column(const json& worked, const json& form, const std::string& name) {
  Eigen::VectorXd values = vector_of(worked.at("input").at("data").at(name).get<std::vector<double>>());
  for (double& value : values) value = apply_form(form, value);
  return values;
}

Fitted fit_of(const json& worked) {
  const json& input = worked.at("input");
  const json& terms = input.at("terms");
  const Eigen::VectorXd y = column(worked, input.at("response_form"), input.at("response"));
  Eigen::MatrixXd x = Eigen::MatrixXd::Ones(y.size(), static_cast<Eigen::Index>(terms.size()) + 1);
  for (std::size_t j = 0; j < terms.size(); ++j)
    x.col(static_cast<Eigen::Index>(j) + 1) = column(worked, terms[j], terms[j].at("column"));
  Eigen::VectorXd weights(0);
  if (input.at("weights").is_array()) weights = vector_of(input.at("weights").get<std::vector<double>>());
  return fit_by_long_double(x, y, weights);
}

/// A figure by its dotted path, in more digits where the file has them.
json figure(const json& worked, const std::string& path) {
  if (worked.at("mp").contains(path)) return std::stod(worked.at("mp").at(path).get<std::string>());
  json found = worked.at("output");
  std::string rest = path;
  while (!rest.empty()) {
    const auto dot = rest.find('.');
    if (!found.is_object() || !found.contains(rest.substr(0, dot))) return nullptr;
    found = json(found.at(rest.substr(0, dot)));
    rest = dot == std::string::npos ? "" : rest.substr(dot + 1);
  }
  return found;
}

/// 1e-8, or what the file's own two computations agree to where that is less (Longley: 11.6 digits).
void same(const json& worked, const std::string& path, double ours, double margin = 0.0) {
  const json theirs = figure(worked, path);
  INFO(worked.at("id").get<std::string>() << " " << path);
  REQUIRE(theirs.is_number());
  CHECK(ours == Approx(theirs.get<double>()).epsilon(1e-8).margin(margin));
}

void same_or_absent(const json& worked, const std::string& path, const std::optional<double>& ours,
                    double margin = 0.0) {
  INFO(worked.at("id").get<std::string>() << " " << path);
  const json theirs = figure(worked, path);
  REQUIRE(theirs.is_number() == ours.has_value());
  if (ours) same(worked, path, *ours, margin);
}

std::vector<json> all_cases() {
  std::vector<std::filesystem::path> files;
  for (const auto& entry : std::filesystem::directory_iterator(FORMSIEVE_SOURCE_DIR "/tests/reference/cases"))
    if (entry.path().extension() == ".json") files.push_back(entry.path());
  std::sort(files.begin(), files.end());
  std::vector<json> cases;
  for (const auto& file : files) cases.push_back(json::parse(std::ifstream(file)));
  return cases;
}

constexpr double kMarginOfP = 1e-12;  // absolute; a p-value below that is not a figure anyone quotes

}  // namespace

TEST_CASE("checks: reference figures are reproduced in every worked case", "[checks][reference]") {
  const auto cases = all_cases();
  REQUIRE(cases.size() == 26);
  for (const json& worked : cases) {
    const Fitted fit = fit_of(worked);
    const auto checks = run_all(fit.ordered(row_order(fit.y.size())));

    const Check& normal = check_named(checks, "normal-residuals");
    same(worked, "tests.shapiro_wilk.W", normal.statistic.value());
    same(worked, "tests.shapiro_wilk.p", normal.p.value(), kMarginOfP);
    same(worked, "tests.moments.skew_g1", normal.size, 1e-10);
    same(worked, "tests.moments.kurt_g2", normal.size2.value(), 1e-10);

    const bool one_column = fit.x.cols() == 2;
    const Check& spread = check_named(checks, one_column ? "equal-spread" : "equal-spread-by-term");
    same(worked, "tests.breusch_pagan_koenker.LM", spread.statistic.value());
    same(worked, "tests.breusch_pagan_koenker.df", spread.df.value());
    same(worked, "tests.breusch_pagan_koenker.p", spread.p.value());

    const Check& straight = check_named(checks, "straightness");
    same_or_absent(worked, "tests.reset.F", straight.statistic);
    same_or_absent(worked, "tests.reset.df1", straight.df);
    same_or_absent(worked, "tests.reset.df2", straight.df2);
    same_or_absent(worked, "tests.reset.p", straight.p, kMarginOfP);

    const Check& row = check_named(checks, "no-single-row");
    same(worked, "influence.cooks_max", row.size2.value());
    same_or_absent(worked, "influence.max_abs_externally_studentised", row.statistic);
    same_or_absent(worked, "influence.p_bonferroni", row.p);
    const auto cooks_row = worked.at("output").at("influence").at("cooks_max_row").get<int>();
    CHECK_THAT(row.size_words, Catch::Contains("row " + std::to_string(cooks_row + 1) + " of"));

    const Check& independent = check_named(checks, "independence");
    same(worked, "tests.durbin_watson", independent.statistic.value());
    same(worked, "tests.ljung_box_1.r1", independent.size, 1e-12);
    for (const Check& check : checks) {
      INFO(worked.at("id").get<std::string>() << " " << check.name);
      CHECK(check.passes == (check.verdict != Verdict::broken));
    }
  }
}

TEST_CASE("checks: single statistics are reproduced in every worked case", "[checks][reference]") {
  for (const json& worked : all_cases()) {
    const Fitted fit = fit_of(worked);
    Eigen::VectorXd residuals = fit.residuals;  // times √weight, of which the cases' tests are made
    if (fit.weights.size() > 0) residuals.array() *= fit.weights.array().sqrt();
    const Moments shape = moments(residuals);
    same(worked, "tests.moments.skew_G1", shape.skewness_adjusted, 1e-10);
    same(worked, "tests.moments.kurt_G2", shape.excess_kurtosis_adjusted, 1e-9);

    const auto darling = anderson_darling(residuals);
    same(worked, "tests.anderson_darling.A2", darling.value().a2);
    same(worked, "tests.anderson_darling.A2_star", darling.value().a2_adjusted);
    same(worked, "tests.anderson_darling.p", darling.value().p, 1e-10);

    const Eigen::VectorXd cooks = cook_distances(fit.subject());
    const json theirs = worked.at("output").at("influence").at("cooks");
    if (theirs.is_array())  // every row, to a share of the largest
      for (Eigen::Index i = 0; i < cooks.size(); ++i)
        CHECK(cooks[i] == Approx(theirs[static_cast<std::size_t>(i)].get<double>()).margin(1e-8 * cooks.maxCoeff()));
    same(worked, "influence.leverage_max", fit.leverage.maxCoeff());

    const auto ljung = ljung_box(residuals, 1);
    same(worked, "tests.ljung_box_1.r1", ljung.value().autocorrelation[0], 1e-12);
    same(worked, "tests.ljung_box_1.Q", ljung.value().q, 1e-12);
    same(worked, "tests.ljung_box_1.p", ljung.value().p, kMarginOfP);
  }
}

TEST_CASE("checks: White's test is reproduced in every worked case, and skipped where it is saturated",
          "[checks][reference]") {
  int saturated = 0;
  for (const json& worked : all_cases()) {
    const Fitted fit = fit_of(worked);
    const Subject subject = fit.subject();
    const Workings workings = prepare(subject);
    const auto test = white(workings.plain.q, centred_squares(workings));
    INFO(worked.at("id").get<std::string>());
    same_or_absent(worked, "tests.white.LM", test ? std::optional(test->lm) : std::nullopt);
    if (!test) {
      ++saturated;
      continue;
    }
    same(worked, "tests.white.df", test->df);
    same(worked, "tests.white.p", test->p, kMarginOfP);
    same(worked, "tests.white.F", test->f);
    same(worked, "tests.white.p_F", test->p_f, kMarginOfP);
    const Check listed = check_named(run_all(subject), "equal-spread-any-shape");
    const bool enough = fit.x.rows() >= 3 * white_columns(fit.x.cols());
    CHECK(listed.statistic.has_value() == enough);
    CHECK(listed.verdict.has_value() == enough);
    if (enough) CHECK(listed.p.value() == test->p);
  }
  CHECK(saturated == 4);
}

TEST_CASE("checks: leverage, Cook and studentised residual of every row are reproduced in every worked case",
          "[checks][reference]") {
  int compared = 0;
  const auto compare = [&](const json& worked, const char* name, const Eigen::VectorXd& ours) {
    const json theirs = worked.at("output").at("influence").value(name, json());
    if (!theirs.is_array()) return;
    INFO(worked.at("id").get<std::string>() << " " << name);
    REQUIRE(theirs.size() == static_cast<std::size_t>(ours.size()));
    const double margin = 1e-8 * ours.cwiseAbs().maxCoeff();  // to a share of the largest
    for (std::size_t i = 0; i < theirs.size(); ++i)
      CHECK(ours[static_cast<Eigen::Index>(i)] == Approx(theirs[i].get<double>()).margin(margin));
    ++compared;
  };
  for (const json& worked : all_cases()) {
    const Fitted fit = fit_of(worked);
    compare(worked, "leverage", fit.leverage);
    compare(worked, "cooks", cook_distances(fit.subject()));
    if (fit.x.rows() - fit.x.cols() < 2) continue;
    const Eigen::VectorXd studentised = externally_studentised(fit.subject());
    compare(worked, "externally_studentised", studentised);
    const double largest = studentised.cwiseAbs().maxCoeff();
    same(worked, "influence.max_abs_externally_studentised", largest);
    Eigen::Index row = 0;
    studentised.cwiseAbs().maxCoeff(&row);
    CHECK(row == worked.at("output").at("influence").at("max_row").get<int>());
    const double one =
        2.0 * boost::math::cdf(boost::math::complement(
                  boost::math::students_t(static_cast<double>(fit.x.rows() - fit.x.cols() - 1)), largest));
    same(worked, "influence.p_raw", one, kMarginOfP);
    same(worked, "influence.p_bonferroni", outlier_p(fit.subject(), largest).value(), kMarginOfP);
  }
  CHECK(compared > 60);
}

TEST_CASE("checks: the condition number of Belsley, Kuh and Welsch is reproduced in every worked case",
          "[checks][reference]") {
  for (const json& worked : all_cases()) {
    const Fitted fit = fit_of(worked);
    const Condition ours = condition(centred_basis(fit.x, fit.weights));  // of the √w-whitened design
    const double theirs = worked.at("output").at("condition_belsley").get<double>();
    INFO(worked.at("id").get<std::string>());
    // a condition number κ carries a rounding of κ·ε, here of the file's own singular value decomposition
    CHECK(ours.index[fit.x.cols() - 1] == Approx(theirs).epsilon(std::max(1e-10, theirs * 1e-14)));
    CHECK(ours.proportion.rowwise().sum().isOnes(1e-12));
  }
}

TEST_CASE("checks: variance inflation is reproduced with and without weights in every worked case",
          "[checks][reference]") {
  int weighted = 0;
  for (const json& worked : all_cases()) {
    INFO(worked.at("id").get<std::string>());
    const Fitted fit = fit_of(worked);
    const auto compare = [&](const Eigen::VectorXd& weights, const json& theirs) {
      const auto ours = inflations(centred_basis(fit.x, weights), fit.term_first);
      REQUIRE(ours.size() == theirs.size());
      for (std::size_t j = 0; j < ours.size(); ++j) CHECK(ours[j] == Approx(theirs[j].get<double>()).epsilon(1e-8));
    };
    compare(Eigen::VectorXd(0), worked.at("output").at("vif"));
    if (fit.weights.size() > 0) {
      compare(fit.weights, worked.at("output").at("vif_weighted"));
      ++weighted;
    }
    const auto checks = run_all(fit.subject());
    const json listed = worked.at("output").at(fit.weights.size() > 0 ? "vif_weighted" : "vif");
    double largest = 1.0;
    for (const auto& one : listed) largest = std::max(largest, one.get<double>());
    const Check& terms = check_named(checks, "separable-terms");
    CHECK(terms.statistic.value() == Approx(largest).epsilon(1e-8));
    CHECK(terms.passes == (largest <= 10.0));
  }
  CHECK(weighted == 2);
}

}  // namespace formsieve::checks

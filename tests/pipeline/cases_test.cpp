// The whole way from a table to shortlist.json against worked cases: tests/reference/cases, computed by NumPy, SciPy,
// statsmodels and mpmath (versions in each file; the 25-digit figures under "mp" are preferred). Each case is run as a
// plan with a single candidate and given folds.
#include "support.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <cstdio>
#include <filesystem>
#include <map>

namespace formsieve::test {

namespace {

using nlohmann::json;

const std::string kCases = std::string(FORMSIEVE_SOURCE_DIR) + "/tests/reference/cases";

/// The cases write forms by other names.
std::string form_name(const std::string& name) {
  static const std::map<std::string, std::string> names = {
      {"cbrt", "cube-root"}, {"boxcox", "box-cox"}, {"rsqrt", "reciprocal-sqrt"}};
  const auto found = names.find(name);
  return found == names.end() ? name : found->second;
}

run::FormEntry entry_of(const json& form) {
  run::FormEntry entry = form_entry(form_name(form.at("form")));
  if (form.contains("lambda")) entry.parameters = {form.at("lambda").get<double>()};
  if (form.contains("anchor")) entry.reflect = form.at("anchor").get<double>();
  if (form.contains("shift")) entry.shift = form.at("shift").get<double>();
  return entry;
}

std::string digits(double value) {
  char text[40];
  std::snprintf(text, sizeof text, "%.17g", value);
  return text;
}

/// The case's table with one column a term (a column may serve two terms), the response, and weights and folds where
/// there are any.
run::Plan plan_of(const json& input, const TemporaryFolder& folder) {
  std::vector<std::pair<std::string, std::vector<double>>> columns;
  const auto data = [&](const std::string& name) { return input.at("data").at(name).get<std::vector<double>>(); };
  const std::string response = input.at("response");
  columns.emplace_back(response, data(response));
  run::Plan plan = plan_for(folder.file("case.csv"), response);
  plan.forms.response = {entry_of(input.at("response_form"))};
  for (std::size_t t = 0; t < input.at("terms").size(); ++t) {
    const json& term = input.at("terms")[t];
    const std::string name = "t" + std::to_string(t) + "_" + term.at("column").get<std::string>();
    columns.emplace_back(name, data(term.at("column")));
    plan.forms.always.push_back(name);
    plan.forms.of[name] = {entry_of(term)};
  }
  if (!input.at("weights").is_null()) {
    columns.emplace_back("case_weight", input.at("weights").get<std::vector<double>>());
    plan.data.weight = "case_weight";
  }
  if (!input.at("folds").is_null()) {
    columns.emplace_back("case_fold", input.at("folds").get<std::vector<double>>());
    plan.data.fold = "case_fold";
  }
  std::string text;
  for (std::size_t c = 0; c < columns.size(); ++c) text += (c ? "," : "") + columns[c].first;
  for (std::size_t i = 0; i < columns.front().second.size(); ++i) {
    text += "\n";
    for (std::size_t c = 0; c < columns.size(); ++c) text += (c ? "," : "") + digits(columns[c].second[i]);
  }
  folder.write("case.csv", text + "\n");
  return plan;
}

/// A figure of the case: its 25-digit value where there is one.
json figure(const json& worked, const std::string& path) {
  if (worked.contains("mp") && worked.at("mp").contains(path)) {
    const json& value = worked.at("mp").at(path);
    if (!value.is_array()) return value.is_string() ? json(std::stod(value.get<std::string>())) : value;
    json numbers = json::array();
    for (const auto& entry : value)
      numbers.push_back(entry.is_string() ? std::stod(entry.get<std::string>()) : entry.get<double>());
    return numbers;
  }
  const json* at = &worked.at("output");
  std::size_t from = 0;
  while (from <= path.size()) {
    const std::size_t to = std::min(path.find('.', from), path.size());
    const std::string key = path.substr(from, to - from);
    if (!at->is_object() || !at->contains(key)) return nullptr;
    at = &at->at(key);
    from = to + 1;
  }
  return *at;
}

class Comparison {
 public:
  Comparison(const json& worked, double tolerance_rel) : worked_(worked), tolerance_rel_(tolerance_rel) {}

  void same(const std::string& path, const json& ours, double scale = 0.0) {
    const json theirs = figure(worked_, path);
    INFO(worked_.at("id") << " " << worked_.at("title") << ": " << path);
    if (theirs.is_null()) return;
    ++compared_;
    REQUIRE_FALSE(ours.is_null());
    const double expected = theirs.get<double>();
    const double margin = tolerance_rel_ * std::max(std::abs(expected), scale);
    CHECK(std::abs(ours.get<double>() - expected) <= margin);
  }
  /// Where the case says undefined, so must we.
  void same_or_null(const std::string& path, const json& ours, double scale = 0.0) {
    INFO(worked_.at("id") << ": " << path);
    if (!figure(worked_, path).is_null()) return same(path, ours, scale);
    ++compared_;
    CHECK(ours.is_null());
  }
  int compared() const { return compared_; }

 private:
  const json& worked_;
  double tolerance_rel_;
  int compared_ = 0;
};

const json& check_named(const json& candidate, const std::string& name) {
  static const json none = {{"statistic", nullptr}, {"p", nullptr}, {"size", nullptr}};
  for (const auto& check : candidate.at("checks"))
    if (check.at("check") == name) return check;
  return none;
}

void compare_fit(Comparison& comparison, const json& worked, const json& ours) {
  const json coefficients = figure(worked, "coefficients");
  const json se = figure(worked, "se");
  const json se_hc3 = figure(worked, "se_hc3");
  REQUIRE(ours.at("coefficients").size() == coefficients.size());
  for (std::size_t k = 0; k < coefficients.size(); ++k) {
    INFO(worked.at("id") << " coefficient " << k);
    const json& mine = ours.at("coefficients")[k];
    const double tolerance = worked.at("id") == "case_29" ? 1e-5 : 1e-8;
    CHECK(mine.at("value").get<double>() ==
          Approx(coefficients[k].get<double>()).epsilon(tolerance).margin(tolerance * se[k].get<double>()));
    CHECK(mine.at("se").get<double>() == Approx(se[k].get<double>()).epsilon(tolerance));
    if (!se_hc3.is_null() && !se_hc3[k].is_null())
      CHECK(mine.at("se_robust").get<double>() == Approx(se_hc3[k].get<double>()).epsilon(tolerance));
  }
  // case_04 counts λ as estimated; design.md counts a listed family member as a choice, so its criteria are smaller by
  // that parameter's penalty
  const double extra =
      worked.at("input").contains("extra_params") ? worked.at("input").at("extra_params").get<double>() : 0.0;
  const double n = worked.at("output").at("n").get<double>();
  comparison.same("rss", ours.at("rss"));
  comparison.same("sigma", ours.at("sigma"));
  comparison.same("likelihood.loglik", ours.at("log_likelihood"), 1.0);
  comparison.same("likelihood.aic", ours.at("aic").get<double>() + 2.0 * extra, 1.0);
  comparison.same("likelihood.bic", ours.at("bic").get<double>() + extra * std::log(n), 1.0);
  if (extra == 0.0) comparison.same_or_null("likelihood.aicc", ours.at("aicc"), 1.0);
  comparison.same("r2_transformed", ours.at("r_squared").at("form_scale"));
}

void compare_own_units(Comparison& comparison, const json& worked, const json& ours) {
  const json& cv = ours.at("cv");
  if (!worked.at("input").at("folds").is_null()) {
    const json scale = figure(worked, "cv.natural.smearing_clamped.rmse");
    comparison.same_or_null("cv.natural.smearing_clamped.rmse", cv.at("rmse"));
    comparison.same_or_null("cv.natural.smearing_clamped.mae", cv.at("mae"));
    comparison.same_or_null("cv.natural.smearing_clamped.bias", cv.at("bias"),
                            scale.is_null() ? 0.0 : scale.get<double>());
    comparison.same_or_null("cv.natural.naive_clamped.rmse", cv.at("rmse_naive"));
    comparison.same("cv.rmse_transformed", cv.at("rmse_form_scale"));
  }
  comparison.same_or_null("natural_in_sample.smearing_clamped.r2", ours.at("r_squared").at("own_units"), 1.0);
  comparison.same("smearing_factor", ours.at("back_transformation").at("smearing_factor"));
}

void compare_checks(Comparison& comparison, const json& worked, const json& ours) {
  const json& normal = check_named(ours, "normal-residuals");
  comparison.same("tests.shapiro_wilk.W", normal.at("statistic"));
  comparison.same("tests.shapiro_wilk.p", normal.at("p"), 1e-12);
  const json& by_term = check_named(ours, worked.at("output").at("p") == 2 ? "equal-spread" : "equal-spread-by-term");
  comparison.same("tests.breusch_pagan_koenker.LM", by_term.at("statistic"));
  comparison.same("tests.breusch_pagan_koenker.p", by_term.at("p"));
  const json& straight = check_named(ours, "straightness");
  if (!straight.at("statistic").is_null()) {
    comparison.same("tests.reset.F", straight.at("statistic"));
    comparison.same("tests.reset.p", straight.at("p"), 1e-12);
  }
  comparison.same("influence.cooks_max", check_named(ours, "no-single-row").at("size2"));
}

}  // namespace

TEST_CASE("pipeline: shortlist.json carries the figures of every worked case", "[pipeline][reference]") {
  int cases = 0;
  for (const auto& entry : std::filesystem::directory_iterator(kCases)) {
    const json worked = json::parse(read_text(entry.path().string()));
    ++cases;
    const TemporaryFolder folder;
    const json shortlist = search_json(plan_of(worked.at("input"), folder), folder);
    INFO(worked.at("id") << " " << worked.at("title"));
    REQUIRE(shortlist.at("space").at("candidates") == "1");
    REQUIRE(shortlist.at("shortlist").size() == 1);
    const json& ours = shortlist.at("shortlist")[0];
    Comparison comparison(worked, worked.at("id") == "case_29" ? 1e-5 : 1e-8);
    compare_fit(comparison, worked, ours);
    compare_own_units(comparison, worked, ours);
    compare_checks(comparison, worked, ours);
    CHECK(comparison.compared() >= 10);
  }
  CHECK(cases == 26);
}

}  // namespace formsieve::test

// Simulation with known truth: the search finds the forms that made the data.
//
// Design: 400 rows; ln y = 1 + 0.5·ln(x1) + 0.1·√x2 + 0.3·x3 + 0.5/x4 + 0.3·z, z standard normal; ln(x1) uniform on
// (0, 3), ln(x2) on (0, 6), x3 on (−2, 3), x4 on (0.2, 5), and a column of noise. Every menu holds the true form, those
// nearest to it and absence.
#include "support.hpp"

#include "base/random.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <cstdio>
#include <map>
#include <numbers>

using namespace formsieve;
using namespace formsieve::test;
using nlohmann::json;

namespace {

constexpr int kSamples = 60;
constexpr int kRows = 400;
constexpr double kSigma = 0.3;

class Draw {
 public:
  explicit Draw(std::uint64_t seed) : random_(seed) {}
  double uniform(double from, double to) {
    return from + (to - from) * (static_cast<double>(random_.next() >> 11) + 0.5) * 0x1p-53;
  }
  /// Box & Muller 1958.
  double normal() {
    return std::sqrt(-2.0 * std::log(uniform(0, 1))) * std::cos(2.0 * std::numbers::pi * uniform(0, 1));
  }

 private:
  base::SplitMix64 random_;
};

std::string made_table(std::uint64_t seed) {
  Draw draw(seed);
  std::string text = "y,x1,x2,x3,x4,noise\n";
  for (int i = 0; i < kRows; ++i) {
    const double x1 = std::exp(draw.uniform(0, 3)), x2 = std::exp(draw.uniform(0, 6)), x3 = draw.uniform(-2, 3),
                 x4 = draw.uniform(0.2, 5), noise = draw.uniform(1, 50);
    const double z = 1.0 + 0.5 * std::log(x1) + 0.1 * std::sqrt(x2) + 0.3 * x3 + 0.5 / x4 + kSigma * draw.normal();
    char line[200];
    std::snprintf(line, sizeof line, "%.10g,%.10g,%.10g,%.10g,%.10g,%.10g\n", std::exp(z), x1, x2, x3, x4, noise);
    text += line;
  }
  return text;
}

run::Plan plan_of(const std::string& file) {
  run::Plan plan = plan_for(file, "y");
  const auto entries = [](std::vector<std::string> forms) {
    std::vector<run::FormEntry> menu;
    for (const auto& form : forms) menu.push_back(form_entry(form));
    return menu;
  };
  const auto positive = entries({"identity", "sqrt", "ln", "reciprocal", "square"});
  plan.forms.response = entries({"identity", "sqrt", "ln"});
  plan.forms.of = {{"x1", positive},
                   {"x2", positive},
                   {"x3", entries({"identity", "square", "cube", "exp", "cube-root"})},
                   {"x4", positive},
                   {"noise", positive}};
  plan.search.pool = 40;
  plan.rank.shortlist = 1;
  return plan;
}

std::string form_of(const json& candidate, const std::string& column) {
  for (const auto& term : candidate.at("terms"))
    if (term.at("column") == column) return term.at("form");
  return "left out";
}

/// The candidate that the program marks as the lowest by AIC. Error in own units is decided by the few largest
/// responses of so skewed a table: of these samples the line of lowest CV RMSE, and the recommended one within 2 % of
/// it, have the four true forms less often (when this was written, all four at once in 8, 15 and, by AIC, 29 of 30
/// samples).
json lowest_by_aic(const json& shortlist) {
  for (const auto& candidate : shortlist.at("shortlist"))
    for (const auto& mark : candidate.at("marks"))
      if (mark == "lowest AIC") return candidate;
  FAIL("no line is the lowest by AIC");
  return {};
}

}  // namespace

TEST_CASE("pipeline: the true form of each predictor is recovered in at least 90 % of samples", "[pipeline][slow]") {
  const std::map<std::string, std::string> truth = {
      {"x1", "ln"}, {"x2", "sqrt"}, {"x3", "identity"}, {"x4", "reciprocal"}};
  std::map<std::string, int> found;
  int response = 0;
  for (int sample = 0; sample < kSamples; ++sample) {
    const TemporaryFolder folder;
    const std::string file = folder.write("made.csv", made_table(1000 + static_cast<std::uint64_t>(sample)));
    const json first = lowest_by_aic(search_json(plan_of(file), folder));
    response += first.at("response").at("form") == "ln" ? 1 : 0;
    for (const auto& [column, form] : truth) found[column] += form_of(first, column) == form ? 1 : 0;
  }
  const int enough = kSamples * 9 / 10;
  CHECK(response >= enough);
  for (const auto& [column, form] : truth) {
    CAPTURE(column, form, found[column]);
    CHECK(found[column] >= enough);
  }
}

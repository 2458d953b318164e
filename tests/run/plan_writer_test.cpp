#include "plan_equality.hpp"

#include <formsieve/run.hpp>

#include <catch2/catch.hpp>

#include <bit>
#include <cmath>
#include <cstdint>
#include <limits>
#include <random>
#include <string>
#include <vector>

using namespace formsieve;
using run::FormEntry;
using run::Plan;

namespace {

/// Plans at random, valid by construction, with names and numbers that are hard to write.
class PlanMaker {
 public:
  explicit PlanMaker(std::uint64_t seed) : random_(seed) {}
  Plan make();

 private:
  std::size_t below(std::size_t n) { return std::uniform_int_distribution<std::size_t>(0, n - 1)(random_); }
  bool coin() { return below(2) == 0; }
  std::string name();
  std::vector<std::string> names(std::size_t most);
  double number();
  FormEntry entry(std::size_t i);
  std::vector<FormEntry> menu();
  void make_data(Plan::Data& data);
  void make_forms(Plan& plan);
  void make_search(Plan& plan);

  std::mt19937_64 random_;
  int serial_ = 0;
};

/// Different every time, so that no rule about duplicates is broken.
std::string PlanMaker::name() {
  static const std::vector<std::string> parts{"area", " ",    ".",       "\"", "\\",    "ö", "m²", "'",
                                              "\n",   "#",    "\t",      "=",  "x-y_z", "[", "]",  "\x01",
                                              "\x7f", "🌧", "\\u00e9", "\r", "{",     ",", "}"};
  std::string out;
  for (std::size_t k = below(4); k > 0; --k) out += parts[below(parts.size())];
  return out + std::to_string(serial_++);
}

std::vector<std::string> PlanMaker::names(std::size_t most) {
  std::vector<std::string> out(below(most + 1));
  for (auto& item : out) item = name();
  return out;
}

double PlanMaker::number() {
  static const std::vector<double> special{0.0,       -0.0,   1.0,
                                           -1.0,      0.1,    1e300,
                                           -1e-300,   5e-324, 9007199254740993.0,
                                           1.8e19,    1e22,   123456789012345680000.0,
                                           1.0 / 3.0, 101,    0.02};
  if (coin()) return special[below(special.size())];
  double value = 0.0;
  do value = std::bit_cast<double>(random_());
  while (!std::isfinite(value));
  return value;
}

FormEntry PlanMaker::entry(std::size_t i) {
  FormEntry out;
  switch (below(5)) {
    case 0:
      out.form = "form-" + std::to_string(i);
      break;
    case 1:
      out.form = "spline", out.parameters = {3.0 + static_cast<double>(below(3))};
      break;
    case 2:
      out.form = "fractional-polynomial", out.parameters = {number(), number()};
      break;
    default:
      out.form = "box-cox", out.parameters = {number()};
  }
  if (coin()) out.reflect_auto = true;
  if (!out.reflect_auto && coin()) out.reflect = number();
  out.shift_auto = coin();
  if (!out.shift_auto && coin()) out.shift = number();
  return out;
}

std::vector<FormEntry> PlanMaker::menu() {
  std::vector<FormEntry> out;
  for (std::size_t i = 0, n = below(5) + 1; i < n; ++i) {
    const FormEntry made = entry(i);
    bool twice = false;
    for (const FormEntry& other : out)
      twice = twice || (other.form == made.form && other.parameters == made.parameters &&
                        other.reflect == made.reflect && other.reflect_auto == made.reflect_auto &&
                        other.shift_auto == made.shift_auto && other.shift.value_or(0) == made.shift.value_or(0));
    if (!twice) out.push_back(made);
  }
  return out;
}

void PlanMaker::make_data(Plan::Data& data) {
  data.file = name();
  data.response = name();
  if (coin()) data.query = name();
  data.ignore = names(3);
  if (coin()) data.weight = name();
  switch (below(4)) {
    case 0:
      data.group = name();
      break;
    case 1:
      data.order = name();
      break;
    case 2:
      data.fold = name();
      break;
    default:
      break;
  }
  for (const auto& column : names(3)) {
    const double a = coin() ? -std::numeric_limits<double>::infinity() : number();
    const double b = coin() ? std::numeric_limits<double>::infinity() : number();
    if (a < b) data.bounds.emplace(column, std::pair{a, b});
  }
  if (coin()) data.separator = std::vector<std::string>{"comma", "semicolon", "tab"}[below(3)];
  if (coin()) data.decimal = data.separator == "comma" ? "point" : "comma";
  if (coin()) data.missing = names(3);
  if (data.missing && coin()) data.missing->push_back("");
  data.text = names(2);
  data.rare_levels = below(10);
}

void PlanMaker::make_forms(Plan& plan) {
  if (coin()) plan.forms.response = menu();
  if (coin()) plan.forms.default_menu = menu();
  plan.forms.always = names(3);
  for (const auto& column : names(3)) plan.forms.direction.emplace(column, coin() ? "rising" : "falling");
  for (const auto& column : names(4)) plan.forms.of.emplace(column, menu());
}

void PlanMaker::make_search(Plan& plan) {
  plan.search.strategy = coin() ? "auto" : "every";
  if (coin()) plan.search.max_terms = plan.forms.always.size() + below(20);
  plan.search.within = std::abs(number());
  plan.search.folds = 2 + below(50);
  if (!plan.data.order && !plan.data.fold) plan.search.repeats = 1 + below(20);
  plan.search.seed = coin() ? random_() : below(100);
  plan.search.pool = 1 + below(100000);
  const std::vector<double> budgets{28800, 5400, 45, 0.1, 1.0 / 3.0, 86400, 3600.5, 1e-5, 7200.000000001};
  plan.search.budget_seconds = budgets[below(budgets.size())];
  plan.rank.by = std::vector<std::string>{"cv_rmse", "aic", "aicc", "bic"}[below(4)];
  plan.rank.shortlist = 1 + below(100);
  plan.rank.near_tie = std::uniform_real_distribution<double>(0.0, 1.0)(random_);
  plan.rank.require = names(3);
}

Plan PlanMaker::make() {
  Plan plan;
  make_data(plan.data);
  make_forms(plan);
  make_search(plan);
  return plan;
}

}  // namespace

TEST_CASE("run: written plan reads back the same when made at random", "[run][property]") {
  for (std::uint64_t seed = 0; seed < 2000; ++seed) {
    const Plan plan = PlanMaker(seed).make();
    const std::string text = run::write_plan(plan);
    const auto again = run::parse_plan(text, "plan.toml");
    INFO("seed " << seed << "\n" << text);
    if (!again.ok()) FAIL(again.error().where << ": " << again.error().message);
    REQUIRE(run::same_plan(plan, *again));
    REQUIRE(run::write_plan(*again) == text);
  }
}

TEST_CASE("run: written plan shows every setting when all are defaults", "[run][unit]") {
  Plan plan;
  plan.data.file = "coldstores.csv";
  plan.data.response = "energy_kwh";
  const std::string text = run::write_plan(plan);
  for (const char* key :
       {"file",      "query",     "response",  "ignore",   "weight", "group",       "order",   "fold",
        "bounds",    "separator", "decimal",   "missing",  "text",   "rare_levels", "default", "always",
        "direction", "strategy",  "max_terms", "within",   "folds",  "repeats",     "seed",    "pool",
        "budget",    "by",        "shortlist", "near_tie", "require"}) {
    INFO(key);
    const std::string word(key);
    CHECK(
        (text.find("\n" + word + " = ") != std::string::npos || text.find("\n# " + word + ": ") != std::string::npos));
  }
  CHECK_THAT(text, Catch::Contains("budget = \"8h\"\n"));
  CHECK_THAT(text, Catch::Contains("seed = 20261201\n"));
  CHECK_THAT(text, Catch::Contains("near_tie = 0.02\n"));
}

TEST_CASE("run: written plan reads back the same when it holds every key", "[run][unit]") {
  const auto plan = run::read_plan(FORMSIEVE_SOURCE_DIR "/tests/run/full-plan.toml");
  REQUIRE(plan.ok());
  const auto again = run::parse_plan(run::write_plan(*plan), "plan.toml");
  REQUIRE(again.ok());
  CHECK(run::same_plan(*plan, *again));
  CHECK(std::signbit(*again->forms.of.at("throughput").at(1).shift));
}

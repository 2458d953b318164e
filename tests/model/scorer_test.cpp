// Scoring in batches against one row at a time by the plain functions.
#include "made_model.hpp"

#include <catch2/catch.hpp>

#include <limits>

namespace formsieve::model::test {

namespace {

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

/// Batched sums are added in another order.
bool same(double fast, double plain) {
  if (std::isnan(fast) || std::isnan(plain)) return std::isnan(fast) && std::isnan(plain);
  if (std::isinf(fast) || std::isinf(plain)) return fast == plain;
  return std::abs(fast - plain) <= 1e-10 * std::max(1.0, std::abs(plain));
}

std::vector<forms::Form> responses() {
  using forms::Kind;
  return {{Kind::identity},         {Kind::sqrt},   {Kind::ln},          {Kind::ln, {}, 5000.0}, {Kind::log10},
          {Kind::cube_root},        {Kind::asinh},  {Kind::reciprocal},  {Kind::logit},          {Kind::box_cox, {0.3}},
          {Kind::yeo_johnson, {0}}, {Kind::square}, {Kind::power, {0.5}}};
}

/// Rows of values, some of them missing, unknown, out of a form's domain or beyond the range seen.
struct Rows {
  std::vector<std::vector<double>> of_term;
  std::vector<double> weights;
};

Rows random_rows(std::mt19937_64& random, const Model& model, bool weighted, std::size_t n) {
  std::uniform_real_distribution<double> uniform;
  Rows rows;
  rows.of_term.resize(model.terms.size());
  for (std::size_t t = 0; t < model.terms.size(); ++t) {
    const bool levels = model.terms[t].form.kind == forms::Kind::levels;
    for (std::size_t i = 0; i < n; ++i) {
      double value = levels ? static_cast<double>(random() % 3) : 0.5 + 89.5 * uniform(random);
      const double fate = uniform(random);
      if (fate < 0.02) value = kNaN;
      if (fate > 0.98) value = levels ? kUnknownLevel : -3.0;
      if (fate > 0.97 && fate < 0.98 && !levels) value = 100.0;
      rows.of_term[t].push_back(value);
    }
  }
  for (std::size_t i = 0; weighted && i < n; ++i) rows.weights.push_back(0.25 + uniform(random));
  return rows;
}

void check_row(const Made& made, const Scores& scores, std::size_t i, const std::vector<double>& values,
               double weight) {
  std::uint8_t expected = 0;
  const auto expect = [&](Flag flag, bool holds) {
    if (holds) expected |= flag;
  };
  for (std::size_t t = 0; t < values.size(); ++t) {
    const Term& term = made.model.terms[t];
    const bool missing = std::isnan(values[t]), levels = term.form.kind == forms::Kind::levels;
    expect(kMissing, missing);
    expect(kUnknown, levels && values[t] < 0.0);
    expect(kOutside, !levels && (values[t] < term.seen_min || values[t] > term.seen_max));
    expect(kUndefined, !missing && !levels && !forms::domain(term.form).contains(values[t]));
  }
  CAPTURE(i, values, static_cast<int>(scores.flags[i]));
  const std::uint8_t no_prediction = kMissing | kUnknown | kUndefined;
  if ((expected & no_prediction) != 0) {
    REQUIRE(scores.flags[i] == expected);
    for (const auto* figures :
         {&scores.mean, &scores.median, &scores.low_normal, &scores.high_normal, &scores.low_cross, &scores.high_cross})
      REQUIRE(std::isnan((*figures)[i]));
    return;
  }
  const Plain plain = plain_score(made, values, weight);
  if (!std::isfinite(plain.median)) {
    REQUIRE((scores.flags[i] & kUndefined) != 0);
    REQUIRE(std::isnan(scores.mean[i]));
    return;
  }
  REQUIRE(same(scores.median[i], plain.median));
  REQUIRE(same(scores.mean[i], plain.mean));
  REQUIRE(same(scores.leverage[i], plain.leverage));
  REQUIRE(same(scores.low_normal[i], plain.normal.lower));
  REQUIRE(same(scores.high_normal[i], plain.normal.upper));
  REQUIRE(same(scores.low_cross[i], plain.cross.lower));
  REQUIRE(same(scores.high_cross[i], plain.cross.upper));
  const bool open = std::isinf(plain.normal.lower) || std::isinf(plain.normal.upper) || std::isinf(plain.cross.lower) ||
                    std::isinf(plain.cross.upper);
  REQUIRE(((scores.flags[i] & kOpenEnd) != 0) == open);
  REQUIRE(((scores.flags[i] & kNoMean) != 0) == std::isnan(plain.mean));
  REQUIRE((scores.flags[i] & kOutside) == (expected & kOutside));
  REQUIRE(((scores.flags[i] & kLeverage) != 0) == (plain.leverage > made.model.largest_leverage));
}

}  // namespace

TEST_CASE("model: batches are scored as single rows are by the plain functions", "[model][property]") {
  std::mt19937_64 random(20261201);
  for (const forms::Form& response : responses()) {
    for (const bool weighted : {false, true}) {
      for (int repeat = 0; repeat < 3; ++repeat) {
        Made made = made_model(random, response, weighted);
        made.level = repeat == 2 ? 0.8 : 0.95;
        REQUIRE(check(made.model).ok());
        const std::size_t n = repeat == 1 ? 1 + random() % 20 : kBatchRows;
        const Rows rows = random_rows(random, made.model, weighted, n);
        std::vector<std::span<const double>> values(rows.of_term.begin(), rows.of_term.end());
        const Scorer scorer(made.model, made.level);
        Scorer::Workspace work(scorer);
        Scores scores;
        scorer.score(values, rows.weights, n, work, scores);
        CAPTURE(forms::label(response, "y"), weighted);
        for (std::size_t i = 0; i < n; ++i) {
          std::vector<double> row;
          for (const auto& of_term : rows.of_term) row.push_back(of_term[i]);
          check_row(made, scores, i, row, weighted ? rows.weights[i] : 1.0);
        }
      }
    }
  }
}

TEST_CASE("model: a rule in parts takes the part of the fitted value", "[model][unit]") {
  Model model;
  model.response = {forms::Kind::ln};
  model.terms = {{"x", {forms::Kind::identity}, 0.0, 10.0, {}}};
  model.coefficients = {0.0, 1.0};
  model.root = {0.1, 0.0, 0.1};
  model.n = 50;
  model.sigma = 0.1;
  MeanPart low, middle, high;
  low.factor = 1.5;
  middle.mean_exp = 2.0;
  middle.residuals = {0.0};
  high.factor = 3.0;
  model.mean = {"smearing by thirds", {1.0, 2.0}, {low, middle, high}};
  REQUIRE(check(model).ok());
  const Scorer scorer(model);
  Scorer::Workspace work(scorer);
  Scores scores;
  const std::vector<double> x = {0.5, 1.0, 1.5, 2.0, 2.5};
  scorer.score(std::vector<std::span<const double>>{x}, {}, x.size(), work, scores);
  const double factors[] = {1.5, 1.5, 2.0, 2.0, 3.0};
  for (std::size_t i = 0; i < x.size(); ++i) CHECK(scores.mean[i] == Approx(factors[i] * std::exp(x[i])));
  CHECK(std::isnan(scores.low_cross[0]));  // no folds, no CV+
}

TEST_CASE("model: a weight that is not positive leaves a row without a prediction", "[model][unit]") {
  std::mt19937_64 random(3);
  const Made made = made_model(random, {forms::Kind::ln}, true);
  const Scorer scorer(made.model);
  Scorer::Workspace work(scorer);
  Scores scores;
  const std::vector<double> value = {1.0, 1.0};
  const std::vector<std::span<const double>> values(made.model.terms.size(), value);
  scorer.score(values, std::vector<double>{0.0, 1.0}, 2, work, scores);
  CHECK(scores.flags[0] == kUndefined);
  CHECK(std::isnan(scores.mean[0]));
  CHECK(std::isfinite(scores.mean[1]));
}

TEST_CASE("model: a broken record is refused with what is broken", "[model][unit]") {
  std::mt19937_64 random(4);
  const Made made = made_model(random, {forms::Kind::ln}, false);
  const auto refused = [&](auto change, const std::string& words) {
    Model model = made.model;
    change(model);
    const Status status = check(model);
    REQUIRE_FALSE(status.ok());
    CHECK(status.error().kind == ErrorKind::data);
    CHECK_THAT(status.error().message, Catch::Contains(words));
  };
  refused([](Model& m) { m.coefficients.pop_back(); }, "coefficients");
  refused([](Model& m) { m.coefficients[0] = kNaN; }, "coefficients");
  refused([](Model& m) { m.root.pop_back(); }, "root");
  refused([](Model& m) { m.n = 0; }, "fewer rows");
  refused([](Model& m) { m.folds[0].coefficients.clear(); }, "fold");
  refused([](Model& m) { std::reverse(m.folds[0].residuals.begin(), m.folds[0].residuals.end()); }, "do not rise");
  refused([](Model& m) { m.mean.parts.clear(); }, "parts");
  refused([](Model& m) { m.mean.parts[0].residuals.clear(); }, "without residuals");
  refused([](Model& m) { m.response = {forms::Kind::quadratic}; }, "no inverse");
}

}  // namespace formsieve::model::test

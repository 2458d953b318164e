// Back to own units of one listed candidate beside plain refits: corrections, intervals and their coverage on held-out
// rows, what new rows need, and the wiring into the record.
#include "backtransform/g_function.hpp"
#include "backtransform/normal_theory.hpp"
#include "fit/least_squares.hpp"
#include "pipeline/examine.hpp"
#include "pipeline/held_out_intervals.hpp"
#include "pipeline/own_units.hpp"
#include "support.hpp"

#include <boost/math/distributions/students_t.hpp>
#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <functional>
#include <map>
#include <random>
#include <sstream>

namespace formsieve::test {

namespace {

using Catch::Contains;
using Eigen::Index;
using forms::Kind;

/// 80 rows of a response with multiplicative errors, in 5 folds and 2 repeats.
struct Made {
  Made(forms::Form form, bool weighted, std::uint64_t seed, Index n = 80) : response(std::move(form)) {
    std::mt19937_64 generator(seed);
    std::normal_distribution<double> normal;
    x = Eigen::MatrixXd::Ones(n, 3);
    z.resize(n);
    if (weighted) weights.resize(n);
    folds.count = 5;
    folds.repeats = 2;
    folds.fold_of.resize(2);
    for (Index i = 0; i < n; ++i) {
      x(i, 1) = normal(generator);
      x(i, 2) = normal(generator);
      if (weighted) weights[i] = std::exp(0.4 * normal(generator));
      z[i] = 3.0 + 0.3 * x(i, 1) - 0.2 * x(i, 2) + 0.25 * normal(generator);
      measured.push_back(forms::inverse(response, z[i]));
      folds.fold_of[0].push_back(static_cast<std::uint32_t>((i * 7) % 5));
      folds.fold_of[1].push_back(static_cast<std::uint32_t>((i / 3) % 5));
    }
  }
  pipeline::FittedRows rows() const { return {response, x, z, weights, measured, folds}; }
  double weight(Index i) const { return weights.size() > 0 ? weights[i] : 1.0; }

  forms::Form response;
  Eigen::MatrixXd x;
  Eigen::VectorXd z, weights;
  std::vector<double> measured;
  design::Folds folds;
};

/// Least squares on the rows that `keep` names.
struct PlainFit {
  PlainFit(const Made& made, const std::function<bool(std::size_t)>& keep) {
    for (std::size_t i = 0; i < made.measured.size(); ++i)
      if (keep(i)) kept.push_back(static_cast<Index>(i));
    const Eigen::VectorXd w = made.weights.size() > 0 ? made.weights(kept).eval() : Eigen::VectorXd();
    fit = *fit::least_squares(made.x(kept, Eigen::all), made.z(kept), w);
  }
  double leverage(const Made& made, Index i) const {
    const Eigen::VectorXd row = made.x.row(i).transpose();
    return row.dot(fit.covariance * row) / (fit.sigma * fit.sigma);
  }
  std::vector<Index> kept;
  fit::Fit fit;
};

/// The mean of row i by one method, term by term.
double plain_mean(const std::string& method, const Made& made, const PlainFit& plain, Index i) {
  const double eta = made.x.row(i).dot(plain.fit.coefficients), w = made.weight(i);
  if (method == "none") return forms::inverse(made.response, eta);
  if (method == "normal theory") return backtransform::NormalMean(made.response, plain.fit.sigma)(eta, w);
  if (method == "unbiased (g-function)")
    return std::exp(eta) * backtransform::unbiased_factor(static_cast<double>(plain.kept.size()) - 3.0, plain.fit.sigma,
                                                          plain.leverage(made, i), w);
  if (method == "ratio of means") {
    double above = 0.0, below = 0.0;
    for (std::size_t k = 0; k < plain.kept.size(); ++k) {
      above += made.measured[static_cast<std::size_t>(plain.kept[k])];
      below += forms::inverse(made.response, plain.fit.fitted[static_cast<Index>(k)]);
    }
    return above / below * forms::inverse(made.response, eta);
  }
  std::vector<double> sorted(plain.fit.fitted.begin(), plain.fit.fitted.end());
  std::sort(sorted.begin(), sorted.end());
  const std::size_t m = sorted.size();
  const double first = sorted[(m + 2) / 3 - 1], second = sorted[(2 * m + 2) / 3 - 1];
  const auto third = [&](double at) { return method == "smearing" ? 0 : at <= first ? 0 : at <= second ? 1 : 2; };
  double total = 0.0, count = 0.0;
  for (std::size_t k = 0; k < m; ++k) {
    const auto at = static_cast<Index>(k);
    if (third(plain.fit.fitted[at]) != third(eta)) continue;
    total += forms::inverse(made.response, eta + plain.fit.residuals[at] * std::sqrt(made.weight(plain.kept[k]) / w));
    count += 1.0;
  }
  return total / count;
}

Result<pipeline::OwnUnits> own_units_of(const Made& made) {
  const auto fit = fit::least_squares(made.x, made.z, made.weights);
  const fit::FoldedFit first_repeat(made.x, made.z, made.weights, made.folds.fold_of[0], made.folds.count);
  return pipeline::own_units(made.rows(), *fit, first_repeat, false, "y", "1 + x");
}

}  // namespace

TEST_CASE("pipeline: corrections are judged with everything from the training part", "[pipeline][property]") {
  for (const forms::Form& response : {forms::Form{Kind::ln}, forms::Form{Kind::sqrt}, forms::Form{Kind::identity}})
    for (const bool weighted : {false, true}) {
      const Made made(response, weighted, 3);
      const auto own = own_units_of(made);
      REQUIRE(own.ok());
      CHECK(own->corrections.size() == (response.kind == Kind::ln ? 6 : response.kind == Kind::sqrt ? 5 : 2));
      const PlainFit all(made, [](std::size_t) { return true; });
      for (const auto& correction : own->corrections) {
        INFO(forms::label(response, "y") << (weighted ? " weighted " : " ") << correction.method);
        double bias = 0.0, squares = 0.0, corrected = 0.0, uncorrected = 0.0;
        for (std::size_t repeat = 0; repeat < 2; ++repeat)
          for (std::uint32_t fold = 0; fold < 5; ++fold) {
            const auto& fold_of = made.folds.fold_of[repeat];
            const PlainFit plain(made, [&](std::size_t i) { return fold_of[i] != fold; });
            for (std::size_t i = 0; i < 80; ++i) {
              if (fold_of[i] != fold) continue;
              const double error = plain_mean(correction.method, made, plain, static_cast<Index>(i)) - made.measured[i];
              bias += error / 160.0;
              squares += error * error / 160.0;
            }
          }
        for (Index i = 0; i < 80; ++i) {
          corrected += plain_mean(correction.method, made, all, i) / 80.0;
          uncorrected += plain_mean("none", made, all, i) / 80.0;
        }
        CHECK(correction.cv_bias.value() == Approx(bias).epsilon(1e-8).margin(1e-10));
        CHECK(correction.cv_rmse.value() == Approx(std::sqrt(squares)).epsilon(1e-10));
        CHECK(correction.factor == Approx(corrected / uncorrected).epsilon(1e-10));
        CHECK(correction.shift.value() == Approx(corrected - uncorrected).epsilon(1e-8).margin(1e-11));
      }
      CHECK(own->used_name == "smearing");
      CHECK_FALSE(own->why_used.empty());
      CHECK_FALSE(own->mean_median_words.empty());
    }
}

TEST_CASE("pipeline: the normal-theory interval is judged from training parts over all repeats",
          "[pipeline][property]") {
  const Made made({Kind::ln}, true, 5);
  const auto own = own_units_of(made);
  double inside = 0.0;
  std::vector<double> widths;
  for (std::size_t repeat = 0; repeat < 2; ++repeat)
    for (std::uint32_t fold = 0; fold < 5; ++fold) {
      const auto& fold_of = made.folds.fold_of[repeat];
      const PlainFit plain(made, [&](std::size_t i) { return fold_of[i] != fold; });
      const double t =
          boost::math::quantile(boost::math::students_t(static_cast<double>(plain.kept.size()) - 3.0), 0.975);
      for (Index i = 0; i < 80; ++i) {
        if (fold_of[static_cast<std::size_t>(i)] != fold) continue;
        const double reach = t * plain.fit.sigma * std::sqrt(1.0 / made.weight(i) + plain.leverage(made, i));
        const double eta = made.x.row(i).dot(plain.fit.coefficients);
        inside += std::abs(made.z[i] - eta) <= reach ? 1.0 : 0.0;
        widths.push_back(std::exp(eta + reach) - std::exp(eta - reach));
      }
    }
  std::sort(widths.begin(), widths.end());
  CHECK(own->normal.coverage.value() == Approx(inside / 160.0).epsilon(1e-12));
  CHECK(own->normal.median_width_own.value() == Approx(0.5 * (widths[79] + widths[80])).epsilon(1e-10));
  CHECK(*own->normal.coverage + *own->normal.below + *own->normal.above == Approx(1.0).epsilon(1e-14));
}

TEST_CASE("pipeline: CV+ is judged by building it anew without each fold", "[pipeline][property]") {
  for (const bool weighted : {false, true}) {
    const Made made({Kind::ln, {}, 100.0, 0.0}, weighted, 6);
    const auto& fold_of = made.folds.fold_of[0];
    double inside = 0.0, below = 0.0;
    std::vector<double> widths;
    for (std::uint32_t outer = 0; outer < 5; ++outer) {
      std::map<std::uint32_t, PlainFit> inner;
      for (std::uint32_t g = 0; g < 5; ++g)
        if (g != outer)
          inner.emplace(g, PlainFit(made, [&](std::size_t i) { return fold_of[i] != outer && fold_of[i] != g; }));
      for (Index i = 0; i < 80; ++i) {
        if (fold_of[static_cast<std::size_t>(i)] != outer) continue;
        std::vector<double> low, high;
        for (Index j = 0; j < 80; ++j) {
          const std::uint32_t g = fold_of[static_cast<std::size_t>(j)];
          if (g == outer) continue;
          const Eigen::VectorXd& beta = inner.at(g).fit.coefficients;
          const double residual =
              std::abs(made.z[j] - made.x.row(j).dot(beta)) * std::sqrt(made.weight(j) / made.weight(i));
          low.push_back(made.x.row(i).dot(beta) - residual);
          high.push_back(made.x.row(i).dot(beta) + residual);
        }
        std::sort(low.begin(), low.end());
        std::sort(high.begin(), high.end());
        // 64 training rows: ⌊0.05·65⌋ = 3rd smallest, ⌈0.95·65⌉ = 62nd smallest.
        const double lower_own = 100.0 - std::exp(high[61]), upper_own = 100.0 - std::exp(low[2]);
        const double y = made.measured[static_cast<std::size_t>(i)];
        inside += lower_own <= y && y <= upper_own ? 1.0 : 0.0;
        below += y < lower_own ? 1.0 : 0.0;
        widths.push_back(upper_own - lower_own);
      }
    }
    std::sort(widths.begin(), widths.end());
    const fit::FoldedFit folded(made.x, made.z, made.weights, fold_of, 5);
    const auto judged = pipeline::judged_cross_interval(made.rows(), folded);
    CHECK(judged.method == "CV+");
    CHECK(judged.coverage.value() == Approx(inside / 80.0).epsilon(1e-12));
    CHECK(judged.below.value() == Approx(below / 80.0).epsilon(1e-12));
    CHECK(judged.median_width_own.value() == Approx(0.5 * (widths[39] + widths[40])).epsilon(1e-9));
    CHECK(judged.note.empty());
  }
}

TEST_CASE("pipeline: CV+ of two folds cannot be judged and says so", "[pipeline][unit]") {
  Made made({Kind::ln}, false, 7);
  made.folds.count = 2;
  for (auto& fold : made.folds.fold_of[0]) fold = fold % 2;
  const fit::FoldedFit folded(made.x, made.z, made.weights, made.folds.fold_of[0], 2);
  const auto judged = pipeline::judged_cross_interval(made.rows(), folded);
  CHECK_FALSE(judged.coverage);
  CHECK_THAT(judged.note, Contains("three folds"));
}

TEST_CASE("pipeline: CV+ of many rows is judged on some of them and says on how many", "[pipeline][unit]") {
  const Made made({Kind::ln}, false, 10, 20000);
  const fit::FoldedFit folded(made.x, made.z, made.weights, made.folds.fold_of[0], 5);
  const auto judged = pipeline::judged_cross_interval(made.rows(), folded);
  CHECK(judged.note == "judged on 5,000 held-out rows, evenly spaced");
  CHECK(std::abs(*judged.coverage - 0.95) < 0.015);  // normal errors; five standard errors of 5,000 rows
}

TEST_CASE("pipeline: what new rows need comes from the fit on all rows and those of the folds",
          "[pipeline][property]") {
  const Made made({Kind::ln}, true, 8);
  const fit::FoldedFit folded(made.x, made.z, made.weights, made.folds.fold_of[0], 5);
  const auto basis = pipeline::interval_basis(made.rows(), folded);
  REQUIRE(basis.ok());
  const PlainFit all(made, [](std::size_t) { return true; });
  CHECK(basis->sigma == Approx(all.fit.sigma).epsilon(1e-12));
  CHECK(basis->df == 77.0);
  CHECK(basis->weighted);
  for (Index i = 0; i < 80; ++i)
    CHECK(backtransform::leverage_at(basis->inverse_root, made.x.row(i).transpose()) ==
          Approx(all.leverage(made, i)).epsilon(1e-11));
  for (std::uint32_t fold = 0; fold < 5; ++fold) {
    const PlainFit plain(made, [&](std::size_t i) { return made.folds.fold_of[0][i] != fold; });
    std::vector<double> residuals;
    for (Index i = 0; i < 80; ++i)
      if (made.folds.fold_of[0][static_cast<std::size_t>(i)] == fold)
        residuals.push_back(std::sqrt(made.weight(i)) *
                            std::abs(made.z[i] - made.x.row(i).dot(plain.fit.coefficients)));
    std::sort(residuals.begin(), residuals.end());
    REQUIRE(basis->residuals[fold].size() == residuals.size());
    for (std::size_t k = 0; k < residuals.size(); ++k)
      CHECK(basis->residuals[fold][k] == Approx(residuals[k]).epsilon(1e-9).margin(1e-12));
  }
}

TEST_CASE("pipeline: a listed candidate carries corrections, intervals and effects", "[pipeline][unit]") {
  // Spread that grows threefold with the response: ln y has a residual sd of 0.1 where a is small, 0.9 where it is
  // large.
  std::mt19937_64 generator(9);
  std::normal_distribution<double> normal;
  std::ostringstream text;
  text.precision(17);
  text << "y,a,site\n";
  const char* sites[] = {"north", "north", "south"};
  for (int i = 0; i < 900; ++i) {
    const double a = std::exp(0.6 * normal(generator));
    const double sd = a < 0.77 ? 0.1 : a < 1.3 ? 0.3 : 0.9;
    text << std::exp(2.0 + 0.8 * std::log(a) + 0.2 * (i % 3 == 2) + sd * normal(generator)) << ',' << a << ','
         << sites[i % 3] << '\n';
  }
  const TemporaryFolder folder;
  run::Plan plan = plan_for(folder.write("spread.csv", text.str()), "y");
  plan.forms.response = {form_entry("ln")};
  plan.forms.of["a"] = {form_entry("ln")};
  plan.forms.always = {"a", "site"};
  plan.forms.direction["a"] = "rising";
  auto table = pipeline::load_table(plan);
  REQUIRE(table.ok());
  const auto prepared = pipeline::prepare(std::move(*table), plan);
  REQUIRE(prepared.ok());
  const pipeline::Examiner examiner(*prepared);
  auto examined = examiner.score({0, {1, 1}}, 0);
  REQUIRE(examined.candidate);
  judge::Candidate& candidate = *examined.candidate;
  REQUIRE(examiner.complete(examined.choice, candidate).ok());

  REQUIRE(candidate.back.corrections.size() == 6);
  for (const auto& correction : candidate.back.corrections)
    if (correction.method == "smearing") {
      CHECK(correction.cv_rmse == candidate.cv.rmse);  // the definition of CV RMSE, to the bit
      CHECK(correction.cv_bias == candidate.cv.bias);
    }
  CHECK(candidate.back.used == "smearing by thirds");
  CHECK_THAT(candidate.back.why_used, Contains("the spread is unequal"));
  CHECK_THAT(candidate.back.formula, Contains(", where f is "));
  REQUIRE(candidate.back.intervals.size() == 2);
  CHECK(candidate.back.intervals[0].method == "normal theory");
  CHECK(candidate.back.intervals[1].coverage.value() > 0.9);
  REQUIRE(candidate.effects.size() == 2);
  CHECK(candidate.effects[0].kind == "elasticity");
  CHECK(candidate.effects[0].direction == "rising");
  CHECK(candidate.effects[0].declared == "rising");
  CHECK(candidate.effects[1].kind == "levels");
  CHECK(candidate.effects[1].from_level == "north");
  CHECK(candidate.effects[1].to_level == "south");
}

}  // namespace formsieve::test

#include "samples.hpp"

#include <cmath>
#include <limits>

namespace formsieve::cli::samples {
namespace {

forms::Form form(forms::Kind kind, std::optional<double> reflect = std::nullopt) {
  forms::Form made;
  made.kind = kind;
  made.reflect = reflect;
  return made;
}

survey::FormTrial trial(const forms::Form& made, const std::string& column, double skewness, const std::string& why) {
  survey::FormTrial one;
  one.form = made;
  one.label = forms::term_name(made, column);
  one.possible = true;
  one.skewness_after = skewness;
  one.suggested = !why.empty();
  one.why = why;
  return one;
}

survey::FormTrial impossible(const forms::Form& made, const std::string& reason, const std::string& repair) {
  survey::FormTrial one;
  one.form = made;
  one.reason = reason;
  one.repair = repair;
  return one;
}

survey::ColumnProfile area() {
  survey::ColumnProfile profile;
  profile.facts.name = "floor_area";
  profile.facts.n = 1420;
  profile.facts.min = 120.5;
  profile.facts.max = 48210.0;
  profile.facts.skewness = 2.417;
  profile.q1 = 812.0;
  profile.median = 1903.25;
  profile.q3 = 4120.0;
  profile.excess_kurtosis = 8.1;
  profile.medcouple = 0.412;
  profile.skew = forms::SkewClass::severe;
  profile.direction = "right";
  profile.n_outlying = 31;
  profile.box_cox_lambda = -0.061;
  const std::string why = "positive and right-skewed (common practice)";
  profile.forms = {trial(form(forms::Kind::identity), "floor_area", 2.417, "always"),
                   trial(form(forms::Kind::sqrt), "floor_area", 1.102, why),
                   trial(form(forms::Kind::ln), "floor_area", -0.04, why),
                   trial(form(forms::Kind::cube_root), "floor_area", 0.8, ""),
                   impossible(form(forms::Kind::logit), "values leave the interval from 0 to 1", "")};
  profile.notes = {"the largest value is 400 times the smallest: ln is likely to help (the log rule)"};
  return profile;
}

survey::ColumnProfile fill() {
  survey::ColumnProfile profile;
  profile.facts.name = "fill_percent";
  profile.facts.n = 1411;
  profile.n_missing = 9;
  profile.facts.min = 0.0;
  profile.facts.max = 100.0;
  profile.facts.n_zero = 3;
  profile.facts.skewness = -1.31;
  profile.q1 = 71.0;
  profile.median = 84.5;
  profile.q3 = 93.0;
  profile.skew = forms::SkewClass::moderate;
  profile.direction = "left";
  profile.n_outlying = 12;
  profile.forms = {
      trial(form(forms::Kind::identity), "fill_percent", -1.31, "always"),
      trial(form(forms::Kind::sqrt, 101.0), "fill_percent", 0.21, "left-skewed, hence reflected (common practice)"),
      impossible(form(forms::Kind::ln), "3 zeros", "a shift, as in { form = \"ln\", shift = \"auto\" }")};
  return profile;
}

survey::ColumnProfile constant() {
  survey::ColumnProfile profile;
  profile.facts.name = "site_code";
  profile.facts.n = 1420;
  profile.facts.min = profile.facts.max = profile.q1 = profile.median = profile.q3 = 7.0;
  profile.direction = "none";
  profile.set_aside = true;
  profile.notes = {"the same value in every row"};
  return profile;
}

survey::ColumnProfile text() {
  survey::ColumnProfile profile;
  profile.facts.name = "region";
  profile.facts.text = true;
  profile.facts.n = 1420;
  profile.facts.levels = {"north coast", "hills", "river", "south", "islands", "border", "camp"};
  profile.facts.level_counts = {600, 400, 200, 120, 60, 38, 2};
  return profile;
}

checks::Check spread(bool passes) {
  checks::Check check;
  check.name = "equal-spread";
  check.method = "Breusch–Pagan (Koenker), against the fitted value";
  check.hypothesis = "the spread of the residuals does not change with the fitted value";
  check.statistic = 14.2;
  check.df = 1.0;
  check.p = 0.00016;
  check.p_adjusted = 0.00098;
  check.size = 1.8;
  check.size_words = "residual spread in the top third 1.8 times that in the bottom third";
  check.passes = passes;
  check.verdict = passes ? checks::Verdict::holds : checks::Verdict::broken;
  check.parts = {{"ln(floor_area)", 9.1, 0.003, 1.7}, {"√(101 − fill_percent)", 1.2, 0.27, 1.1}};
  if (!passes) check.mends = {"ln of the response: the best candidate with it has a ratio of 1.1"};
  return check;
}

checks::Influence influence() {
  checks::Influence made;
  made.largest_leverage = 0.0312;
  made.n_downweighted = 7;
  made.rows = {{17, 18, 0.0312, 0.214, 4.87, 0.0018, 0.61, "ln(floor_area)", -0.83, 2},
               {302, 305, 0.0101, 0.094, -3.21, 1.0, 0.24, "intercept", 0.41, std::nullopt}};
  made.robust = {{"intercept", 3.19, -0.2}, {"ln(floor_area)", 0.862, 1.93}, {"√(101 − fill_percent)", -0.12, 0.1}};
  made.words = {"a fit that a few rows cannot move has ln(floor_area) at 0.862, 1.9 standard errors away"};
  return made;
}

std::vector<backtransform::Interval> intervals() {
  return {{"normal theory", 0.95, 0.9461, 0.031, 0.0229, 41210.0, ""},
          {"CV+", 0.95, 0.9539, 0.0241, 0.022, 42877.0, "judged on 5 of 10 folds"}};
}

judge::Candidate candidate(std::size_t rank, double rmse, double aic) {
  judge::Candidate one;
  one.rank = rank;
  one.number = std::to_string(834211 + rank);
  one.response_column = "energy_kwh";
  one.response = form(forms::Kind::ln);
  one.terms = {{"floor_area", form(forms::Kind::ln)}, {"fill_percent", form(forms::Kind::sqrt, 101.0)}};
  one.equation = "ln(energy_kwh) = 3.21 + 0.84·ln(floor_area) − 0.12·√(101 − fill_percent)";
  one.coefficients = {{"intercept", 3.2104, 0.101, 0.112},
                      {"ln(floor_area)", 0.8402, 0.0113, 0.0125},
                      {"√(101 − fill_percent)", -0.1204, 0.0101, 0.0098}};
  one.n = 1411;
  one.rss = 61.2;
  one.sigma = 0.2086;
  one.likelihood = {-16023.4, aic, aic + 0.03, aic + 21.0, 4};
  one.cv.rmse = rmse;
  one.cv.rmse_se = 612.71;
  one.cv.bias = -12.3;
  one.cv.mae = 8034.0;
  one.cv.mae_median = 5210.0;
  one.cv.rmse_naive = rmse * 1.03;
  one.cv.rmse_form_scale = 0.2101;
  one.cv.fold_mse = {1.21e8, 1.69e8, 1.96e8};
  one.r2_form_scale = 0.941;
  one.r2_own_units = 0.9338;
  one.checks = {spread(rank != 2)};
  one.back.smearing_factor = 1.0221;
  one.back.formula = "energy_kwh = 1.0221 · exp(3.21 + 0.84·ln(floor_area) − 0.12·√(101 − fill_percent))";
  one.back.corrections = {{"none", 1.0, -812.0, rmse * 1.03, 0.0, ""}, {"smearing", 1.0221, -12.3, rmse, 801.4, ""}};
  one.back.why_used = "Smearing is used: it supposes nothing of the shape of the residuals";
  one.back.mean_median_words = "The uncorrected prediction is a median, 2.2 % below the mean";
  one.back.intervals = intervals();
  one.influence = influence();
  one.effects = {{"floor_area",
                  "elasticity",
                  0.0,
                  0.0,
                  "",
                  "",
                  {},
                  {},
                  8.3,
                  7.9,
                  8.7,
                  "rising",
                  "rising",
                  "10 % more floor_area goes with 8.3 % more energy_kwh (95 % interval 7.9 to 8.7)"}};
  const double infinity = std::numeric_limits<double>::infinity();
  one.ranges = {{"floor_area", 120.5, 48210.0, {0.0, infinity, false, false}, {}},
                {"fill_percent", 0.0, 100.0, {-infinity, 101.0, false, true}, {}}};
  one.cautions = {"the spread of the residuals grows with the fitted value: intervals are too narrow for large stores"};
  return one;
}

// One set of candidates: its error under each response form beside the best, its distance from the lowest AIC.
judge::Standing standing(std::optional<double> loss_y, std::optional<double> loss_ln, std::optional<double> loss_root) {
  judge::Standing made;
  for (const auto& loss : {loss_y, loss_ln, loss_root}) {
    judge::Reach reach;
    if (loss) {
      reach.cv_rmse_form = 0.2 * (1.0 + *loss);
      reach.cv_loss_rel = loss;
      reach.criterion_loss = 1000.0 * *loss;
    }
    made.by_response.push_back(reach);
  }
  return made;
}

judge::SpaceSummary summary() {
  judge::SpaceSummary made;
  made.responses.resize(3);
  judge::PredictorProfile fills;
  fills.column = "fill_percent";
  fills.weight_share = 0.9812;
  fills.choices = {{form(forms::Kind::identity), standing(0.001, 0.0123, 0.002)},
                   {form(forms::Kind::sqrt, 101.0), standing(0.0, 0.0, 0.0)},
                   {std::nullopt, standing(0.3, 0.055, 0.2)}};
  judge::PredictorProfile areas;
  areas.column = "floor_area";
  areas.weight_share = 1.0;
  areas.choices = {{form(forms::Kind::identity), standing(0.0, 0.41, 0.1)},
                   {form(forms::Kind::sqrt), standing(0.02, 0.031, 0.0)},
                   {form(forms::Kind::ln), standing(0.04, 0.0, 0.02)},
                   {std::nullopt, standing(3.0, 2.2, 2.0)}};
  made.predictors = {fills, areas};
  made.by_terms = {{0, standing(3.1, 2.3, 2.1)}, {1, standing(0.4, 0.055, 0.2)}, {2, standing(0.0, 0.0, 0.0)}};
  return made;
}

}  // namespace

survey::Survey survey() {
  survey::Survey made;
  made.file = "coldstores.csv";
  made.n_rows = 1420;
  made.rare_level_count = 5;
  made.columns = {area(), fill(), constant(), text()};
  return made;
}

judge::Shortlist shortlist() {
  judge::Shortlist made;
  made.formsieve = "0.1.0";
  made.data.file = "coldstores.csv";
  made.data.response = "energy_kwh";
  made.data.rows_read = 1420;
  made.data.rows_used = 1411;
  made.space.candidates = made.space.scored = "5859375";
  made.space.pooled = made.space.examined = 2000;
  made.folds = {10, 1, 20261201, "shuffled"};
  judge::Candidate first = candidate(1, 12343.2, 30512.4);
  first.marks = {"best"};
  judge::Candidate second = candidate(2, 12351.9, 30508.1);
  second.marks = {"recommended", "lowest AIC"};
  second.terms = {{"floor_area", form(forms::Kind::sqrt)}};
  judge::Candidate third = candidate(3, 12377.7, 30540.9);
  third.response = form(forms::Kind::sqrt);
  judge::Candidate last = candidate(41, 12900.1, 30601.0);
  last.marks = {"simplest"};
  last.response = form(forms::Kind::identity);
  last.terms.clear();
  last.cv.rmse.reset();
  last.cv.n_undefined = 3;
  made.candidates = {first, second, third, last};
  made.responses = {form(forms::Kind::identity), form(forms::Kind::ln), form(forms::Kind::sqrt)};
  made.summary = summary();
  made.remarks = {"The best by CV RMSE and the lowest AIC differ in the form of floor_area."};
  made.cautions = {"The winner's error is the smallest of 5,859,375 and therefore too small."};
  return made;
}

}  // namespace formsieve::cli::samples

#include "made_shortlist.hpp"

#include <bit>
#include <cmath>
#include <limits>
#include <random>
#include <vector>

namespace formsieve::test {

namespace {

using judge::Candidate;
using judge::Shortlist;

class Maker {
 public:
  explicit Maker(std::uint64_t seed) : random_(seed) {}

  std::size_t below(std::size_t n) { return std::uniform_int_distribution<std::size_t>(0, n - 1)(random_); }
  bool coin() { return below(2) == 0; }
  std::size_t count() { return coin() ? below(1000) : random_() >> 1; }
  std::string digits() { return std::to_string(random_()) + std::to_string(random_()); }
  std::string text();
  std::vector<std::string> texts();
  double number();
  double number_or_nan() { return below(5) == 0 ? std::numeric_limits<double>::quiet_NaN() : number(); }
  std::optional<double> maybe() { return coin() ? std::optional<double>(number()) : std::nullopt; }
  template <class Make>
  auto several(Make make) {
    std::vector<decltype(make())> out;
    for (std::size_t k = below(4); k > 0; --k) out.push_back(make());
    return out;
  }

  forms::Form form();
  checks::Check check();
  checks::Influence influence();
  backtransform::Summary back();
  backtransform::Effect effect();
  judge::CrossValidation cv();
  judge::ValidRange range();
  judge::PredictorMenu menu();
  Candidate candidate();
  judge::SpaceSummary summary(std::size_t n_responses);
  judge::ProvedReach proved_reach(std::size_t n_responses);
  judge::ProofReport proof(std::size_t n_responses);

 private:
  judge::Reach reach() { return {maybe(), maybe(), maybe(), maybe()}; }
  judge::Standing standing(std::size_t n_responses);
  judge::ScoreDistribution scores();
  std::mt19937_64 random_;
};

std::string Maker::text() {
  static const std::vector<std::string> parts{"a", "Ω", "√", "\"", "\\",   "\n",   "\r", "\t",
                                              ",", ";", " ", "−",  "🌧", "\x01", "/"};
  std::string out;
  for (std::size_t k = below(6); k > 0; --k) out += parts[below(parts.size())];
  return out;
}

std::vector<std::string> Maker::texts() {
  return several([&] { return text(); });
}

double Maker::number() {
  static const std::vector<double> special{0.0,
                                           -0.0,
                                           1.0,
                                           0.1,
                                           1e308,
                                           5e-324,
                                           -1.7976931348623157e308,
                                           1.0 / 3.0,
                                           1e22,
                                           9007199254740993.0,
                                           123456789012345680000.0,
                                           -2.5};
  if (coin()) return special[below(special.size())];
  double value = 0.0;
  do value = std::bit_cast<double>(random_());
  while (!std::isfinite(value));
  return value;
}

forms::Form Maker::form() {
  forms::Form form;
  form.kind = static_cast<forms::Kind>(below(static_cast<std::size_t>(forms::Kind::levels) + 1));
  if (form.kind >= forms::Kind::power && form.kind <= forms::Kind::yeo_johnson) form.parameters = {number()};
  if (form.kind == forms::Kind::fractional_polynomial) form.parameters = {number(), number()};
  if (form.kind == forms::Kind::spline) form.parameters = {number(), number(), number(), number()};
  form.reflect = maybe();
  form.shift = number();
  if (form.kind == forms::Kind::levels) {
    form.levels = {text(), text(), text()};
    form.pooled = texts();
  }
  return form;
}

checks::Check Maker::check() {
  checks::Check check;
  for (auto* words : {&check.name, &check.method, &check.hypothesis, &check.size_words, &check.note}) *words = text();
  for (auto* figure : {&check.statistic, &check.df, &check.df2, &check.p, &check.p_adjusted, &check.size2})
    *figure = maybe();
  check.size = number_or_nan();
  check.passes = coin();
  if (coin()) check.verdict = static_cast<checks::Verdict>(below(3));
  check.parts = several([&] { return checks::CheckPart{text(), maybe(), maybe(), number_or_nan()}; });
  check.mends = texts();
  return check;
}

checks::Influence Maker::influence() {
  checks::Influence influence;
  influence.largest_leverage = number_or_nan();
  influence.n_downweighted = count();
  influence.rows = several([&] {
    return checks::InfluentialRow{count(),         count(),
                                  number_or_nan(), number_or_nan(),
                                  number_or_nan(), number_or_nan(),
                                  number_or_nan(), text(),
                                  number_or_nan(), coin() ? std::optional<std::size_t>(count()) : std::nullopt};
  });
  influence.robust = several([&] { return checks::RobustCoefficient{text(), number_or_nan(), number_or_nan()}; });
  influence.words = texts();
  return influence;
}

backtransform::Summary Maker::back() {
  backtransform::Summary back;
  back.smearing_factor = number();
  for (auto* words : {&back.used, &back.formula, &back.why_used, &back.mean_median_words}) *words = text();
  back.corrections =
      several([&] { return backtransform::Correction{text(), number_or_nan(), maybe(), maybe(), maybe(), text()}; });
  back.intervals = several(
      [&] { return backtransform::Interval{text(), number_or_nan(), maybe(), maybe(), maybe(), maybe(), text()}; });
  return back;
}

backtransform::Effect Maker::effect() {
  backtransform::Effect effect;
  for (auto* words : {&effect.column, &effect.kind, &effect.from_level, &effect.to_level, &effect.direction,
                      &effect.declared, &effect.words})
    *words = text();
  effect.from = number_or_nan();
  effect.to = number_or_nan();
  for (auto* figure : {&effect.at_from, &effect.at_to, &effect.change, &effect.low, &effect.high}) *figure = maybe();
  return effect;
}

judge::CrossValidation Maker::cv() {
  judge::CrossValidation cv;
  cv.rmse = maybe();
  cv.rmse_se = maybe();
  cv.bias = maybe();
  cv.mae = maybe();
  cv.mae_median = maybe();
  cv.rmse_naive = maybe();
  cv.rmse_form_scale = number_or_nan();
  cv.bias_form_scale = number_or_nan();
  cv.fold_mse = several([&] { return number_or_nan(); });
  cv.n_undefined = count();
  return cv;
}

judge::ValidRange Maker::range() {
  const double infinity = std::numeric_limits<double>::infinity();
  return {text(),
          number(),
          number(),
          {coin() ? -infinity : number(), coin() ? infinity : number(), coin(), coin()},
          texts()};
}

judge::PredictorMenu Maker::menu() {
  return {text(), coin(), several([&] { return form(); }), texts(), texts()};
}

Candidate Maker::candidate() {
  Candidate c;
  c.rank = count();
  c.number = digits();
  c.marks = texts();
  c.response_column = text();
  c.response = form();
  c.terms = several([&] { return judge::Term{text(), form()}; });
  c.equation = text();
  c.coefficients = several([&] { return fit::Coefficient{text(), number(), number_or_nan(), number_or_nan()}; });
  c.n = count();
  c.rss = number();
  c.sigma = number_or_nan();
  c.likelihood = {number(), number(), coin() ? std::numeric_limits<double>::infinity() : number(), number(), count()};
  c.cv = cv();
  c.r2_form_scale = number_or_nan();
  c.r2_own_units = maybe();
  c.checks = several([&] { return check(); });
  c.back = back();
  c.ranges = several([&] { return range(); });
  c.influence = influence();
  c.effects = several([&] { return effect(); });
  c.pareto = coin();
  c.siblings = texts();
  c.cautions = texts();
  return c;
}

judge::Standing Maker::standing(std::size_t n_responses) {
  judge::Standing standing{{}, maybe(), maybe(), maybe()};
  for (std::size_t r = 0; r < n_responses; ++r) standing.by_response.push_back(reach());
  return standing;
}

judge::ScoreDistribution Maker::scores() {
  judge::ScoreDistribution scores;
  scores.counts = several([&] { return static_cast<std::uint64_t>(count()); });
  if (scores.counts.empty()) return scores;
  for (std::size_t i = 0; i < scores.counts.size(); ++i) scores.edges.push_back(number());
  scores.edges.push_back(coin() ? std::numeric_limits<double>::infinity() : number());
  return scores;
}

judge::ProvedReach Maker::proved_reach(std::size_t n_responses) {
  judge::ProvedReach reach{maybe(), maybe(), maybe(), coin(), std::nullopt};
  if (coin()) reach.response = below(n_responses);
  return reach;
}

judge::ProofReport Maker::proof(std::size_t n_responses) {
  judge::ProofReport proof;
  if (n_responses == 0) return proof;
  proof.criterion = static_cast<judge::Criterion>(below(4));
  proof.proved = coin();
  proof.gap = number();
  proof.tolerance = number();
  proof.within = number();
  proof.n_near = count();
  proof.near_complete = coin();
  for (std::size_t r = 0; r < n_responses; ++r) proof.responses.push_back(proved_reach(n_responses));
  const auto choice = [&] {
    judge::ProvedChoice made;
    if (coin()) made.form = form();
    made.reach = proved_reach(n_responses);
    made.near_share = number();
    return made;
  };
  proof.predictors = several([&] { return judge::ProvedPredictor{text(), coin(), several(choice)}; });
  proof.by_terms = several([&] { return judge::ProvedTerms{count(), proved_reach(n_responses)}; });
  proof.words = texts();
  return proof;
}

judge::SpaceSummary Maker::summary(std::size_t n_responses) {
  judge::SpaceSummary summary;
  if (n_responses == 0) return summary;
  summary.criterion = static_cast<judge::Criterion>(below(4));
  for (std::size_t r = 0; r < n_responses; ++r) summary.responses.push_back({reach(), maybe(), scores()});
  const auto choice = [&] {
    return judge::FormStanding{coin() ? std::optional<forms::Form>(form()) : std::nullopt, standing(n_responses)};
  };
  summary.predictors = several([&] { return judge::PredictorProfile{text(), coin(), several(choice), maybe()}; });
  summary.by_terms = several([&] { return judge::TermsStanding{count(), standing(n_responses)}; });
  return summary;
}

}  // namespace

Shortlist made_shortlist(std::uint64_t seed) {
  Maker make(seed);
  Shortlist s;
  s.formsieve = make.text();
  s.data = {make.text(),  make.text(),
            make.text(),  make.text(),
            make.text(),  make.text(),
            make.text(),  make.count(),
            make.count(), make.several([&] { return std::pair{make.text(), make.count()}; })};
  s.space = {make.digits(), make.digits(), make.digits(), make.text(),  make.text(),  make.coin(),
             make.coin(),   make.number(), make.count(),  make.count(), make.count(), make.count(),
             make.text(),   make.text(),   1.5,           make.text()};
  s.folds = {make.count(), make.count(), make.coin() ? ~std::uint64_t{0} : make.below(100), make.text()};
  s.criterion = static_cast<judge::Criterion>(make.below(4));
  s.near_tie = make.number();
  s.responses = make.several([&] { return make.form(); });
  s.response_notes = make.texts();
  s.menus = make.several([&] { return make.menu(); });
  s.summary = make.summary(make.coin() ? s.responses.size() : 0);
  s.proof = make.proof(make.coin() ? s.responses.size() : 0);
  s.candidates = make.several([&] { return make.candidate(); });
  s.remarks = make.texts();
  s.cautions = make.texts();
  return s;
}

namespace {

judge::Standing plain_standing(double loss) {
  judge::Standing standing;
  for (const double rmse : {80.0, 0.25}) {
    judge::Reach reach;
    reach.cv_rmse_form = rmse * (1.0 + loss);
    reach.cv_loss_rel = loss;
    reach.criterion = 600.5 + 100.0 * loss;
    reach.criterion_loss = 100.0 * loss;
    standing.by_response.push_back(reach);
  }
  standing.criterion = 600.5 + 100.0 * loss;
  standing.criterion_loss = 100.0 * loss;
  standing.weight_share = 0.5;
  return standing;
}

/// For the two response forms and the first predictor of plain_shortlist().
judge::SpaceSummary plain_summary() {
  judge::SpaceSummary summary;
  const judge::Standing best = plain_standing(0.0);
  summary.responses = {{best.by_response[0], 0.25, {{0.0, 100.0, 200.0}, {3, 5}}},
                       {best.by_response[1], 0.75, {{0.5, std::numeric_limits<double>::infinity()}, {8}}}};
  forms::Form ln;
  ln.kind = forms::Kind::ln;
  judge::Standing nothing;
  nothing.by_response.resize(2);
  summary.predictors = {
      {"floor_area", false, {{forms::Form{}, plain_standing(0.5)}, {ln, best}, {std::nullopt, nothing}}, 0.875}};
  summary.by_terms = {{0, plain_standing(2.0)}, {1, best}};
  return summary;
}

}  // namespace

Shortlist plain_shortlist() {
  Shortlist s;
  s.formsieve = "0.1.0";
  s.data = {"coldstores.csv", "ab12", "energy_kwh", "", "", "", "", 420, 411, {{"throughput_t", 9}}};
  s.space.candidates = s.space.scored = "1234567890";
  s.folds = {10, 1, 20261201, "shuffled"};
  forms::Form ln;
  ln.kind = forms::Kind::ln;
  forms::Form reflected;
  reflected.kind = forms::Kind::sqrt;
  reflected.reflect = 101.0;
  s.responses = {forms::Form{}, ln};
  s.menus = {{"floor_area", false, {forms::Form{}, ln}, {"floor_area", "ln(floor_area)"}, {}},
             {"fill, percent", false, {forms::Form{}, reflected}, {"fill, percent", "√(101 − fill, percent)"}, {}}};
  s.summary = plain_summary();
  Candidate c;
  c.rank = 1;
  c.number = "834211";
  c.marks = {"best", "recommended"};
  c.response_column = "energy_kwh";
  c.response = ln;
  c.terms = {{"floor_area", ln}, {"fill, percent", reflected}};
  c.equation = "ln(energy_kwh) = 3.21 + 0.84·ln(floor_area) − 0.12·√(101 − fill, percent)";
  c.coefficients = {{"intercept", 3.21, 0.1, 0.11}, {"ln(floor_area)", 0.84, 0.02, 0.03}};
  c.n = 411;
  c.cv.rmse = 1234.5;
  c.cv.fold_mse = {1.0, 2.0};
  c.checks.resize(2);
  c.checks[0].name = "equal-spread";
  c.checks[0].passes = false;
  c.checks[1].name = "straightness";
  c.back.corrections.resize(1);
  c.back.corrections[0].method = "smearing";
  c.ranges = {{"floor_area", 12.0, 9000.0, {0.0, std::numeric_limits<double>::infinity(), false, false}, {}}};
  c.cautions = {"the spread is unequal"};
  s.candidates = {c, c};
  s.candidates[1].rank = 2;
  s.candidates[1].marks = {"simplest"};
  s.candidates[1].terms.pop_back();
  s.candidates[1].cv.rmse = std::nullopt;
  s.cautions = {"the p-values do not know of the search"};
  return s;
}

}  // namespace formsieve::test

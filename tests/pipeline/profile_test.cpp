// The whole space in figures against plain minima and sums over a list of every candidate, and against the examination.
#include "../search/plain_summary.hpp"
#include "pipeline/examine.hpp"
#include "pipeline/prepare.hpp"
#include "pipeline/penalties.hpp"
#include "pipeline/profile.hpp"
#include "support.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <limits>
#include <map>
#include <numeric>

namespace formsieve::test {

namespace {

using judge::Criterion;
using nlohmann::json;

const std::string kOpen = std::string(FORMSIEVE_SOURCE_DIR) + "/tests/reference/open";
constexpr double kInfinity = std::numeric_limits<double>::infinity();

/// Everything that a search of a small table has before its walk.
struct Setting {
  pipeline::Prepared prepared;
  base::GramSet grams;
};

Setting setting(const run::Plan& plan) {
  auto table = pipeline::load_table(plan);
  REQUIRE(table.ok());
  auto prepared = pipeline::prepare(std::move(*table), plan);
  if (!prepared) FAIL(prepared.error().message);
  auto grams = design::build_grams(prepared->data, prepared->folds, 1);
  REQUIRE(grams.ok());
  return {std::move(*prepared), std::move(*grams)};
}

run::Plan trees() {
  run::Plan plan = plan_for(kOpen + "/trees.csv", "volume");
  plan.forms.response = {form_entry("identity"), form_entry("sqrt"), form_entry("ln")};
  plan.forms.of["girth"] = {form_entry("identity"), form_entry("sqrt"), form_entry("ln"), form_entry("quadratic")};
  plan.forms.of["height"] = {form_entry("identity"), form_entry("reciprocal"), form_entry("ln")};
  plan.search.folds = 5;
  plan.search.repeats = 2;
  return plan;
}

/// A finished walk of which the summary alone is known.
search::WalkResult walked(search::Summary summary) {
  search::WalkResult result;
  result.summary = std::move(summary);
  return result;
}

/// One candidate by the examination: what the screen's figures must agree with.
struct Entry {
  search::Choice choice;
  double cv_rmse = 0.0;
  double criterion = 0.0;
};

double criterion_of(const fit::Likelihood& likelihood, Criterion criterion) {
  switch (criterion) {
    case Criterion::aicc:
      return likelihood.aicc;
    case Criterion::bic:
      return likelihood.bic;
    default:
      return likelihood.aic;
  }
}

std::vector<Entry> examined(const Setting& made, Criterion criterion) {
  const pipeline::Examiner examiner(made.prepared);
  std::vector<Entry> entries;
  for (const auto& list : every_scored(made.prepared.space, made.grams))
    for (const auto& scored : list) {
      const auto one = examiner.score(scored.choice, scored.number);
      REQUIRE(one.candidate);
      entries.push_back(
          {scored.choice, one.candidate->cv.rmse_form_scale, criterion_of(one.candidate->likelihood, criterion)});
    }
  return entries;
}

/// Plain minima and weights of the entries that a condition picks out.
struct Plain {
  double cv_rmse = kInfinity, criterion = kInfinity, weight = 0.0;
};

template <class Belongs>
Plain plain(const std::vector<Entry>& entries, double lowest, Belongs belongs) {
  Plain result;
  for (const Entry& entry : entries) {
    if (!belongs(entry.choice)) continue;
    result.cv_rmse = std::min(result.cv_rmse, entry.cv_rmse);
    result.criterion = std::min(result.criterion, entry.criterion);
    result.weight += std::exp(-0.5 * (entry.criterion - lowest));
  }
  return result;
}

void check_standing(const judge::Standing& standing, const std::vector<Entry>& entries,
                    const std::function<bool(const search::Choice&)>& belongs) {
  const Plain whole = plain(entries, 0.0, [](const auto&) { return true; });
  const Plain all = plain(entries, whole.criterion, [](const auto&) { return true; });
  const Plain own = plain(entries, whole.criterion, belongs);
  CHECK(standing.criterion.value() == Approx(own.criterion).margin(1e-4));
  CHECK(standing.criterion_loss.value() == Approx(own.criterion - all.criterion).margin(1e-4));
  CHECK(standing.weight_share.value() == Approx(own.weight / all.weight).margin(2e-6));
  for (std::size_t r = 0; r < standing.by_response.size(); ++r) {
    const auto of_response = [&](const search::Choice& choice) { return choice.response == r; };
    const Plain best = plain(entries, whole.criterion, of_response);
    const Plain here =
        plain(entries, whole.criterion, [&](const search::Choice& c) { return of_response(c) && belongs(c); });
    const judge::Reach& reach = standing.by_response[r];
    CHECK(reach.cv_rmse_form.value() == Approx(here.cv_rmse).epsilon(1e-8));
    CHECK(reach.cv_loss_rel.value() == Approx(here.cv_rmse / best.cv_rmse - 1.0).margin(1e-6));
    CHECK(reach.criterion.value() == Approx(here.criterion).margin(1e-4));
    CHECK(reach.criterion_loss.value() == Approx(here.criterion - all.criterion).margin(1e-4));
  }
}

std::size_t n_terms(const search::Choice& choice) {
  return static_cast<std::size_t>(
      std::count_if(choice.choice.begin(), choice.choice.end(), [](std::uint16_t c) { return c != 0; }));
}

/// Every figure of the summary against the examination of every candidate.
void check_against_examination(const Setting& made, Criterion ranked_by) {
  const Criterion criterion = pipeline::summary_criterion(ranked_by);
  const auto penalty = pipeline::penalties(made.prepared, ranked_by);
  const auto summary =
      pipeline::space_summary(walked(plain_summary(made.prepared.space, made.grams, penalty)), made.prepared, ranked_by,
                              pipeline::Examiner(made.prepared).likelihood_constants());
  const std::vector<Entry> entries = examined(made, criterion);
  CHECK(summary.criterion == criterion);
  REQUIRE(summary.predictors.size() == made.prepared.data.predictors.size());
  for (std::size_t j = 0; j < summary.predictors.size(); ++j) {
    const judge::PredictorProfile& predictor = summary.predictors[j];
    const design::Predictor& searched = made.prepared.data.predictors[j];
    INFO(predictor.column);
    CHECK(predictor.column == searched.column);
    CHECK(predictor.always == searched.always);
    REQUIRE(predictor.choices.size() == searched.menu.size() + (searched.always ? 0 : 1));
    double in = 0.0;
    for (std::size_t i = 0; i < predictor.choices.size(); ++i) {
      const bool absent = i == searched.menu.size();
      CHECK(predictor.choices[i].form == (absent ? std::optional<forms::Form>() : searched.menu[i]));
      check_standing(predictor.choices[i].standing, entries,
                     [&](const search::Choice& c) { return c.choice[j] == (absent ? 0 : i + 1); });
      if (!absent) in += *predictor.choices[i].standing.weight_share;
    }
    CHECK(predictor.weight_share.value() == Approx(in).margin(1e-5));
  }
  std::size_t most = 0;
  for (const Entry& entry : entries) most = std::max(most, n_terms(entry.choice));
  CHECK(summary.by_terms.back().n_terms == most);
  for (const judge::TermsStanding& terms : summary.by_terms)
    check_standing(terms.standing, entries, [&](const search::Choice& c) { return n_terms(c) == terms.n_terms; });
}

/// Candidates of a response form by the bars of its histogram, counted one by one.
void check_histogram(const judge::ScoreDistribution& scores, const std::vector<double>& cv_rmse) {
  REQUIRE(scores.edges.size() == scores.counts.size() + 1);
  CHECK(scores.counts.front() > 0);
  CHECK(scores.counts.back() > 0);
  CHECK(std::is_sorted(scores.edges.begin(), scores.edges.end()));
  for (std::size_t i = 0; i < scores.counts.size(); ++i) {
    const auto inside = [&](double rmse) { return rmse >= scores.edges[i] && rmse < scores.edges[i + 1]; };
    CHECK(static_cast<std::size_t>(std::count_if(cv_rmse.begin(), cv_rmse.end(), inside)) == scores.counts[i]);
  }
}

}  // namespace

TEST_CASE("pipeline: the form profile is what examining every candidate says", "[pipeline][property]") {
  check_against_examination(setting(trees()), Criterion::cv_rmse);
}

TEST_CASE("pipeline: the form profile follows the plan's criterion", "[pipeline][property]") {
  const Setting made = setting(trees());
  check_against_examination(made, Criterion::aicc);
  check_against_examination(made, Criterion::bic);
}

TEST_CASE("pipeline: the form profile holds with weights, max_terms and a predictor that is always in",
          "[pipeline][property]") {
  const TemporaryFolder folder;
  std::string text = "y,a,b,c,w\n";
  for (int i = 1; i <= 40; ++i) {
    const double a = 1.0 + (i * 7) % 41, b = 2.0 + (i * 11) % 43, c = 1.0 + (i * 5) % 37;
    const double y = 5.0 + 2.0 * std::sqrt(a) + 0.1 * b + 0.3 * ((i * 13) % 17);
    for (const double value : {y, a, b, c}) text += std::to_string(value) + ",";
    text += std::to_string(0.5 + (i % 4)) + "\n";
  }
  run::Plan plan = plan_for(folder.write("table.csv", text), "y");
  plan.data.weight = "w";
  plan.forms.always = {"a"};
  plan.search.max_terms = 2;
  plan.forms.response = {form_entry("identity"), form_entry("ln")};
  for (const char* column : {"a", "b", "c"}) plan.forms.of[column] = {form_entry("identity"), form_entry("sqrt")};
  const Setting made = setting(plan);
  REQUIRE(made.prepared.space.max_terms == 2);
  check_against_examination(made, Criterion::cv_rmse);
}

TEST_CASE("pipeline: the histogram of scores counts every candidate where it belongs", "[pipeline][property]") {
  const Setting made = setting(trees());
  const auto penalty = pipeline::penalties(made.prepared, Criterion::aic);
  const auto summary =
      pipeline::space_summary(walked(plain_summary(made.prepared.space, made.grams, penalty)), made.prepared,
                              Criterion::aic, pipeline::Examiner(made.prepared).likelihood_constants());
  const std::vector<Entry> entries = examined(made, Criterion::aic);
  for (std::size_t r = 0; r < summary.responses.size(); ++r) {
    std::vector<double> cv_rmse;
    for (const Entry& entry : entries)
      if (entry.choice.response == r) cv_rmse.push_back(entry.cv_rmse);
    check_histogram(summary.responses[r].scores, cv_rmse);
  }
}

TEST_CASE("pipeline: the histogram ends where candidates end, and its open ends are said to be open",
          "[pipeline][unit]") {
  using search::Summary;
  const Setting made = setting(trees());
  Summary made_up = plain_summary(made.prepared.space, made.grams, pipeline::penalties(made.prepared, Criterion::aic));
  for (auto& response : made_up.responses) response.histogram.assign(Summary::kBins, 0);
  made_up.responses[0].histogram.assign(Summary::kBins, 3);
  made_up.responses[1].histogram[20] = 7;
  made_up.responses[1].histogram[22] = 5;
  const auto summary = pipeline::space_summary(walked(made_up), made.prepared, Criterion::aic,
                                               pipeline::Examiner(made.prepared).likelihood_constants());
  const judge::ScoreDistribution& whole = summary.responses[0].scores;
  CHECK(whole.counts == std::vector<std::uint64_t>(Summary::kBins, 3));
  CHECK(whole.edges.front() == 0.0);
  CHECK(whole.edges.back() == kInfinity);
  const judge::ScoreDistribution& some = summary.responses[1].scores;
  CHECK(some.counts == std::vector<std::uint64_t>{7, 0, 5});
  REQUIRE(some.edges.size() == 4);
  // 31 trees, each held out twice
  for (std::size_t i = 0; i < some.edges.size(); ++i)
    CHECK(some.edges[i] == Approx(std::sqrt(Summary::edge(20 + i) * made_up.unit_sse[1] / 62.0)).epsilon(1e-8));
  CHECK(summary.responses[2].scores.counts.empty());
  CHECK(summary.responses[2].scores.edges.empty());
}

TEST_CASE("pipeline: what was not scored, fits exactly or has no density is unset", "[pipeline][unit]") {
  const Setting made = setting(trees());
  const auto penalty = pipeline::penalties(made.prepared, Criterion::aic);
  const auto constants = pipeline::Examiner(made.prepared).likelihood_constants();
  const auto translated = [&](const auto& change) {
    search::WalkResult result = walked(plain_summary(made.prepared.space, made.grams, penalty));
    auto own = constants;
    change(result.summary, own);
    return pipeline::space_summary(result, made.prepared, Criterion::aic, own);
  };
  const auto absent = translated([](search::Summary& summary, auto&) { summary.responses[0].of_choice[0][0] = {}; });
  const judge::FormStanding& left_out = absent.predictors[0].choices.back();
  CHECK_FALSE(left_out.standing.by_response[0].cv_rmse_form);
  CHECK_FALSE(left_out.standing.by_response[0].cv_loss_rel);
  CHECK_FALSE(left_out.standing.by_response[0].criterion);
  CHECK(left_out.standing.by_response[1].criterion);

  const auto exact = translated([](search::Summary& summary, auto&) {
    summary.responses[0].all = {0.0, 0.0, kInfinity};
    summary.responses[0].of_choice[0][1] = {0.0, 0.0, kInfinity};
  });
  CHECK(exact.responses[0].best.cv_rmse_form == 0.0);
  CHECK(exact.predictors[0].choices[0].standing.by_response[0].cv_loss_rel == 0.0);
  CHECK_FALSE(exact.predictors[0].choices[1].standing.by_response[0].cv_loss_rel);
  CHECK_FALSE(exact.responses[0].best.criterion);
  CHECK_FALSE(exact.responses[0].weight_share);

  const auto none = translated([](search::Summary&, auto& own) { own.log_jacobian[0] = -kInfinity; });
  CHECK_FALSE(none.responses[0].best.criterion);
  CHECK(none.responses[0].weight_share == 0.0);
  CHECK(none.responses[0].best.cv_rmse_form);
  CHECK(none.responses[1].weight_share.value() + none.responses[2].weight_share.value() == Approx(1.0).margin(2e-6));
  CHECK(pipeline::space_summary({}, made.prepared, Criterion::aic, constants).empty());
}

TEST_CASE("pipeline: a walk that was stopped gives no shares of weight", "[pipeline][unit]") {
  const Setting made = setting(trees());
  const auto penalty = pipeline::penalties(made.prepared, Criterion::aic);
  search::WalkResult stopped = walked(plain_summary(made.prepared.space, made.grams, penalty));
  stopped.complete = false;
  const auto summary = pipeline::space_summary(stopped, made.prepared, Criterion::aic,
                                               pipeline::Examiner(made.prepared).likelihood_constants());
  CHECK_FALSE(summary.responses[0].weight_share);
  CHECK_FALSE(summary.predictors[0].weight_share);
  CHECK_FALSE(summary.predictors[0].choices[0].standing.weight_share);
  CHECK_FALSE(summary.by_terms[0].standing.weight_share);
  CHECK(summary.predictors[0].choices[0].standing.criterion);
}

TEST_CASE("pipeline: shortlist.json holds the whole space, and its lowest AIC is that of the shortlist",
          "[pipeline][property]") {
  const TemporaryFolder folder;
  const json shortlist = search_json(trees(), folder);
  double lowest = kInfinity;
  for (const auto& candidate : shortlist.at("shortlist")) lowest = std::min(lowest, candidate.at("aic").get<double>());
  double best = kInfinity, counted = 0.0;
  for (const auto& response : shortlist.at("response_profile"))
    best = std::min(best, response.at("criterion").get<double>());
  CHECK(best == Approx(lowest).margin(1e-4));
  for (const auto& scores : shortlist.at("score_distribution"))
    for (const auto& count : scores.at("candidates")) counted += count.get<double>();
  CHECK(counted == std::stod(shortlist.at("space").at("scored").get<std::string>()));
  REQUIRE(shortlist.at("form_profile").size() == 2);
  CHECK(shortlist.at("form_profile")[0].at("choices").size() == 5);
  CHECK(shortlist.at("by_terms").size() == 3);
}

}  // namespace formsieve::test

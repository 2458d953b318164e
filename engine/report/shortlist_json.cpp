// shortlist.json: the stable contract of design.md, and beside it everything else that a shortlist knows, so that a run
// can be read back whole. Nothing in it depends on the clock or on the number of threads.
#include <formsieve/report.hpp>

#include "report/criterion_name.hpp"
#include "report/examination_json.hpp"
#include "report/json_text.hpp"
#include "report/proof_json.hpp"
#include "report/schema.hpp"
#include "report/summary_json.hpp"

namespace formsieve::report {

namespace {

Json data_json(const judge::DataSummary& data) {
  Json json;
  json["file"] = data.file;
  json["sha256"] = data.sha256;
  json["rows_read"] = count_json(data.rows_read);
  json["rows_used"] = count_json(data.rows_used);
  json["response"] = data.response;
  json["weight"] = text_or_null(data.weight);
  json["group"] = text_or_null(data.group);
  json["order"] = text_or_null(data.order);
  json["fold"] = text_or_null(data.fold);
  json["dropped"] = Json::array();
  for (const auto& [column, rows] : data.dropped)
    json["dropped"].push_back({{"column", column}, {"rows", count_json(rows)}});
  return json;
}

/// Without the seconds: they are different every time, and this file is not.
Json space_json(const judge::Coverage& space) {
  Json json;
  json["candidates"] = space.candidates;
  json["scored"] = space.scored;
  json["strategy"] = space.strategy;
  json["strategy_why"] = space.strategy_why;
  json["proved"] = space.proved;
  json["gap"] = number_or_null(space.gap);
  json["complete"] = space.complete;
  json["inseparable"] = space.inseparable;
  json["pooled"] = count_json(space.pooled);
  json["examined"] = count_json(space.examined);
  json["set_aside_direction"] = count_json(space.set_aside_direction);
  json["set_aside_require"] = count_json(space.set_aside_require);
  json["pool_formed"] = space.pool_formed;
  json["pool_margin"] = space.pool_margin;
  json["family_rule"] = space.family_rule;
  return json;
}

Json folds_json(const judge::FoldSummary& folds) {
  Json json;
  json["count"] = count_json(folds.count);
  json["repeats"] = count_json(folds.repeats);
  json["seed"] = count_json(folds.seed);
  json["kind"] = folds.kind;
  return json;
}

Json menu_json(const judge::PredictorMenu& menu) {
  Json json;
  json["column"] = menu.column;
  json["always"] = menu.always;
  json["forms"] = Json::array();
  for (const forms::Form& form : menu.forms) json["forms"].push_back(form_json(form));
  json["labels"] = menu.labels;
  json["notes"] = menu.notes;
  return json;
}

/// The named lines, by mark: the rank that carries it.
Json picks_json(const std::vector<judge::Candidate>& candidates) {
  Json json = Json::object();
  for (const judge::Candidate& candidate : candidates)
    for (const std::string& mark : candidate.marks)
      if (!json.contains(mark)) json[mark] = count_json(candidate.rank);
  return json;
}

Json term_json(const judge::Term& term) {
  Json json;
  json["column"] = term.column;
  json.update(form_json(term.form));
  return json;
}

Json coefficient_json(const fit::Coefficient& coefficient) {
  Json json;
  json["term"] = coefficient.term;
  json["value"] = number_or_null(coefficient.value);
  json["se"] = number_or_null(coefficient.se);
  json["se_robust"] = number_or_null(coefficient.se_robust);
  return json;
}

Json cv_json(const judge::CrossValidation& cv) {
  Json json;
  json["rmse"] = number_or_null(cv.rmse);
  json["rmse_se"] = number_or_null(cv.rmse_se);
  json["bias"] = number_or_null(cv.bias);
  json["mae"] = number_or_null(cv.mae);
  json["mae_median"] = number_or_null(cv.mae_median);
  json["rmse_form_scale"] = number_or_null(cv.rmse_form_scale);
  json["bias_form_scale"] = number_or_null(cv.bias_form_scale);
  json["rmse_naive"] = number_or_null(cv.rmse_naive);
  json["n_undefined"] = count_json(cv.n_undefined);
  json["fold_mse"] = Json::array();
  for (const double mse : cv.fold_mse) json["fold_mse"].push_back(number_or_null(mse));
  return json;
}

Json range_json(const judge::ValidRange& range) {
  Json json;
  json["column"] = range.column;
  json["seen_min"] = number_or_null(range.seen_min);
  json["seen_max"] = number_or_null(range.seen_max);
  json["defined"] = {{"lower", number_or_null(range.defined.lower)},
                     {"upper", number_or_null(range.defined.upper)},
                     {"lower_closed", range.defined.lower_closed},
                     {"upper_closed", range.defined.upper_closed}};
  json["levels"] = range.levels;
  return json;
}

Json candidate_json(const judge::Candidate& candidate) {
  Json json;
  json["rank"] = count_json(candidate.rank);
  json["candidate"] = candidate.number;
  json["marks"] = candidate.marks;
  json["response"] = form_json(candidate.response);
  json["response_column"] = candidate.response_column;
  json["terms"] = list_json(candidate.terms, term_json);
  json["equation"] = candidate.equation;
  json["coefficients"] = list_json(candidate.coefficients, coefficient_json);
  json["n"] = count_json(candidate.n);
  json["rss"] = number_or_null(candidate.rss);
  json["sigma"] = number_or_null(candidate.sigma);
  json["log_likelihood"] = number_or_null(candidate.likelihood.log_likelihood);
  json["aic"] = number_or_null(candidate.likelihood.aic);
  json["aicc"] = number_or_null(candidate.likelihood.aicc);
  json["bic"] = number_or_null(candidate.likelihood.bic);
  json["n_parameters"] = count_json(candidate.likelihood.n_parameters);
  json["cv"] = cv_json(candidate.cv);
  json["r_squared"] = {{"form_scale", number_or_null(candidate.r2_form_scale)},
                       {"own_units", number_or_null(candidate.r2_own_units)}};
  json["checks"] = list_json(candidate.checks, check_json);
  json["back_transformation"] = back_json(candidate.back);
  json["ranges"] = list_json(candidate.ranges, range_json);
  json["influence"] = influence_json(candidate.influence);
  json["effects"] = list_json(candidate.effects, effect_json);
  json["pareto"] = candidate.pareto;
  json["siblings"] = candidate.siblings;
  json["cautions"] = candidate.cautions;
  return json;
}

}  // namespace

std::string shortlist_json(const judge::Shortlist& shortlist) {
  Json json;
  json["formsieve"] = shortlist.formsieve;
  json["schema"] = kShortlistSchema;
  json["data"] = data_json(shortlist.data);
  json["space"] = space_json(shortlist.space);
  json["folds"] = folds_json(shortlist.folds);
  json["criterion"] = criterion_text(shortlist.criterion);
  json["near_tie"] = number_or_null(shortlist.near_tie);
  json["response_forms"] = list_json(shortlist.responses, form_json);
  json["response_notes"] = shortlist.response_notes;
  json["menus"] = list_json(shortlist.menus, menu_json);
  json["picks"] = picks_json(shortlist.candidates);
  json["shortlist"] = list_json(shortlist.candidates, candidate_json);
  json.update(summary_json(shortlist.summary, shortlist.responses));
  json.update(proof_json(shortlist.proof, shortlist.responses));
  json["remarks"] = shortlist.remarks;
  json["cautions"] = shortlist.cautions;
  return json_text(json);
}

}  // namespace formsieve::report

#include "report/summary_json.hpp"

#include "report/criterion_name.hpp"

namespace formsieve::report {

namespace {

Json reach_json(const judge::Reach& reach) {
  Json json;
  json["cv_rmse_form_scale"] = number_or_null(reach.cv_rmse_form);
  json["cv_loss"] = number_or_null(reach.cv_loss_rel);
  json["criterion"] = number_or_null(reach.criterion);
  json["criterion_loss"] = number_or_null(reach.criterion_loss);
  return json;
}

Json standing_json(const judge::Standing& standing) {
  Json json;
  json["criterion"] = number_or_null(standing.criterion);
  json["criterion_loss"] = number_or_null(standing.criterion_loss);
  json["weight_share"] = number_or_null(standing.weight_share);
  json["by_response"] = list_json(standing.by_response, reach_json);
  return json;
}

/// { "form": null, … } stands for leaving the predictor out.
Json choice_json(const judge::FormStanding& choice) {
  Json json;
  if (choice.form)
    json = form_json(*choice.form);
  else
    json["form"] = nullptr;
  json.update(standing_json(choice.standing));
  return json;
}

Json predictor_json(const judge::PredictorProfile& predictor) {
  Json json;
  json["column"] = predictor.column;
  json["always"] = predictor.always;
  json["weight_share"] = number_or_null(predictor.weight_share);
  json["choices"] = list_json(predictor.choices, choice_json);
  return json;
}

Json terms_json(const judge::TermsStanding& terms) {
  Json json;
  json["terms"] = count_json(terms.n_terms);
  json.update(standing_json(terms.standing));
  return json;
}

Json response_json(const judge::ResponseProfile& profile, const forms::Form& form) {
  Json json = form_json(form);
  json["weight_share"] = number_or_null(profile.weight_share);
  json.update(reach_json(profile.best));
  return json;
}

Json scores_json(const judge::ResponseProfile& profile) {
  Json json;
  json["cv_rmse_form_scale"] = list_json(profile.scores.edges, [](double edge) { return number_or_null(edge); });
  json["candidates"] = list_json(profile.scores.counts, count_json);
  return json;
}

}  // namespace

Json summary_json(const judge::SpaceSummary& summary, const std::vector<forms::Form>& responses) {
  Json json = Json::object();
  if (summary.empty()) return json;
  json["summary_criterion"] = criterion_text(summary.criterion);
  json["response_profile"] = Json::array();
  for (std::size_t r = 0; r < summary.responses.size(); ++r)
    json["response_profile"].push_back(response_json(summary.responses[r], responses.at(r)));
  json["form_profile"] = list_json(summary.predictors, predictor_json);
  json["by_terms"] = list_json(summary.by_terms, terms_json);
  json["score_distribution"] = list_json(summary.responses, scores_json);
  return json;
}

}  // namespace formsieve::report

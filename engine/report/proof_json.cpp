#include "report/proof_json.hpp"

#include "report/criterion_name.hpp"

namespace formsieve::report {

namespace {

/// "response_form" counts from 0 in "response_forms".
Json reach_json(const judge::ProvedReach& reach) {
  Json json;
  json["criterion"] = number_or_null(reach.criterion);
  json["loss"] = number_or_null(reach.loss);
  json["loss_at_least"] = number_or_null(reach.loss_at_least);
  json["proved"] = reach.proved;
  json["response_form"] = reach.response ? Json(count_json(*reach.response)) : Json(nullptr);
  return json;
}

/// { "form": null, … } stands for leaving the predictor out.
Json choice_json(const judge::ProvedChoice& choice) {
  Json json;
  if (choice.form)
    json = form_json(*choice.form);
  else
    json["form"] = nullptr;
  json.update(reach_json(choice.reach));
  json["near_share"] = number_or_null(choice.near_share);
  return json;
}

Json predictor_json(const judge::ProvedPredictor& predictor) {
  Json json;
  json["column"] = predictor.column;
  json["always"] = predictor.always;
  json["choices"] = list_json(predictor.choices, choice_json);
  return json;
}

Json terms_json(const judge::ProvedTerms& terms) {
  Json json;
  json["terms"] = count_json(terms.n_terms);
  json.update(reach_json(terms.reach));
  return json;
}

Json near_json(const judge::ProofReport& proof) {
  Json json;
  json["within"] = number_or_null(proof.within);
  json["candidates"] = count_json(proof.n_near);
  json["complete"] = proof.near_complete;
  return json;
}

}  // namespace

Json proof_json(const judge::ProofReport& proof, const std::vector<forms::Form>& responses) {
  Json json = Json::object();
  if (proof.empty()) return json;
  Json own;
  own["criterion"] = criterion_text(proof.criterion);
  own["proved"] = proof.proved;
  own["gap"] = number_or_null(proof.gap);
  own["tolerance"] = number_or_null(proof.tolerance);
  own["near_best"] = near_json(proof);
  own["responses"] = Json::array();
  for (std::size_t r = 0; r < proof.responses.size(); ++r) {
    Json response = form_json(responses.at(r));
    response.update(reach_json(proof.responses[r]));
    own["responses"].push_back(std::move(response));
  }
  own["form_profile"] = list_json(proof.predictors, predictor_json);
  own["by_terms"] = list_json(proof.by_terms, terms_json);
  own["words"] = proof.words;
  json["proof"] = std::move(own);
  return json;
}

}  // namespace formsieve::report

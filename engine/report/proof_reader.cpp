#include "report/proof_reader.hpp"

#include "report/criterion_name.hpp"
#include "report/form_reader.hpp"

#include <string>

namespace formsieve::report {

namespace {

judge::ProvedReach read_reach(const Node& node, std::size_t n_responses) {
  judge::ProvedReach reach;
  reach.criterion = node.at("criterion").optional_number();
  reach.loss = node.at("loss").optional_number();
  reach.loss_at_least = node.at("loss_at_least").optional_number();
  reach.proved = node.at("proved").truth();
  const Node response = node.at("response_form");
  if (response.is_null()) return reach;
  reach.response = response.count();
  if (*reach.response >= n_responses) {
    response.report("is " + std::to_string(*reach.response) + ", and there are " + std::to_string(n_responses) +
                    " response forms, counted from 0");
    reach.response.reset();
  }
  return reach;
}

judge::ProvedPredictor read_predictor(const Node& node, std::size_t n_responses) {
  judge::ProvedPredictor predictor;
  predictor.column = node.at("column").text();
  predictor.always = node.at("always").truth();
  for (const Node& item : node.at("choices").items()) {
    judge::ProvedChoice choice;
    if (!item.at("form").is_null()) choice.form = read_form(item);
    choice.reach = read_reach(item, n_responses);
    choice.near_share = item.at("near_share").number(0.0);
    predictor.choices.push_back(std::move(choice));
  }
  return predictor;
}

}  // namespace

judge::ProofReport read_proof(const Node& root, std::size_t n_responses) {
  judge::ProofReport proof;
  const Node node = root.get("proof");
  if (!node.present()) return proof;
  proof.criterion = read_criterion(node.at("criterion"), judge::Criterion::aic);
  proof.proved = node.at("proved").truth();
  proof.gap = node.at("gap").number();
  proof.tolerance = node.at("tolerance").number();
  const Node near = node.at("near_best");
  proof.within = near.at("within").number();
  proof.n_near = near.at("candidates").count();
  proof.near_complete = near.at("complete").truth();
  for (const Node& item : node.at("responses").items()) proof.responses.push_back(read_reach(item, n_responses));
  if (proof.responses.size() != n_responses)
    node.at("responses").report("must have one entry for each of " + std::to_string(n_responses) + " response forms");
  for (const Node& item : node.at("form_profile").items())
    proof.predictors.push_back(read_predictor(item, n_responses));
  for (const Node& item : node.at("by_terms").items())
    proof.by_terms.push_back({item.at("terms").count(), read_reach(item, n_responses)});
  proof.words = node.at("words").texts();
  return proof;
}

}  // namespace formsieve::report

#include "report/summary_reader.hpp"

#include "report/criterion_name.hpp"
#include "report/form_reader.hpp"

#include <algorithm>
#include <limits>
#include <string>

namespace formsieve::report {

namespace {

judge::Reach read_reach(const Node& node) {
  return {node.at("cv_rmse_form_scale").optional_number(), node.at("cv_loss").optional_number(),
          node.at("criterion").optional_number(), node.at("criterion_loss").optional_number()};
}

/// The list, which must have one entry a response form.
std::vector<Node> one_a_response(const Node& list, std::size_t n_responses) {
  std::vector<Node> items = list.items();
  if (list.present() && items.size() != n_responses)
    list.report("has " + std::to_string(items.size()) + " entries, and must have one for each of " +
                std::to_string(n_responses) + " response forms");
  items.resize(std::min(items.size(), n_responses), list);
  return items;
}

judge::Standing read_standing(const Node& node, std::size_t n_responses) {
  judge::Standing standing;
  standing.criterion = node.at("criterion").optional_number();
  standing.criterion_loss = node.at("criterion_loss").optional_number();
  standing.weight_share = node.at("weight_share").optional_number();
  for (const Node& item : one_a_response(node.at("by_response"), n_responses))
    standing.by_response.push_back(read_reach(item));
  return standing;
}

judge::FormStanding read_choice(const Node& node, std::size_t n_responses) {
  judge::FormStanding choice;
  if (!node.at("form").is_null()) choice.form = read_form(node);
  choice.standing = read_standing(node, n_responses);
  return choice;
}

judge::PredictorProfile read_predictor(const Node& node, std::size_t n_responses) {
  judge::PredictorProfile predictor;
  predictor.column = node.at("column").text();
  predictor.always = node.at("always").truth();
  predictor.weight_share = node.at("weight_share").optional_number();
  for (const Node& item : node.at("choices").items()) predictor.choices.push_back(read_choice(item, n_responses));
  return predictor;
}

judge::ScoreDistribution read_scores(const Node& node) {
  judge::ScoreDistribution scores;
  const Node edges = node.at("cv_rmse_form_scale");
  for (const Node& edge : edges.items()) scores.edges.push_back(edge.number(std::numeric_limits<double>::infinity()));
  for (const Node& count : node.at("candidates").items()) scores.counts.push_back(count.count());
  const std::size_t wanted = scores.counts.empty() ? 0 : scores.counts.size() + 1;
  if (edges.present() && scores.edges.size() != wanted)
    edges.report("has " + std::to_string(scores.edges.size()) + " entries, and must have one more than 'candidates'");
  return scores;
}

}  // namespace

judge::SpaceSummary read_summary(const Node& root, std::size_t n_responses) {
  judge::SpaceSummary summary;
  const Node responses = root.get("response_profile");
  if (!responses.present()) return summary;
  summary.criterion = read_criterion(root.at("summary_criterion"), judge::Criterion::aic);
  for (const Node& item : one_a_response(responses, n_responses))
    summary.responses.push_back({read_reach(item), item.at("weight_share").optional_number(), {}});
  const std::vector<Node> scores = one_a_response(root.at("score_distribution"), n_responses);
  for (std::size_t r = 0; r < std::min(scores.size(), summary.responses.size()); ++r)
    summary.responses[r].scores = read_scores(scores[r]);
  for (const Node& item : root.at("form_profile").items())
    summary.predictors.push_back(read_predictor(item, n_responses));
  for (const Node& item : root.at("by_terms").items())
    summary.by_terms.push_back({item.at("terms").count(), read_standing(item, n_responses)});
  return summary;
}

}  // namespace formsieve::report

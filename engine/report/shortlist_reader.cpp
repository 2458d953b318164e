// shortlist.json read back. Keys of the contract must be there; keys that were added to it may be absent, so that files
// of earlier versions can be read; keys that are not known are passed over, so that files of later ones can.
#include <formsieve/report.hpp>

#include "report/criterion_name.hpp"
#include "report/examination_reader.hpp"
#include "report/form_reader.hpp"
#include "report/json_reader.hpp"
#include "report/schema.hpp"
#include "report/proof_reader.hpp"
#include "report/summary_reader.hpp"

#include <limits>
#include <utility>

namespace formsieve::report {

namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();

judge::DataSummary read_data(const Node& node) {
  judge::DataSummary data;
  data.file = node.at("file").text();
  data.sha256 = node.at("sha256").text();
  data.rows_read = node.at("rows_read").count();
  data.rows_used = node.at("rows_used").count();
  data.response = node.at("response").text();
  data.weight = node.get("weight").text_or_empty();
  data.group = node.get("group").text_or_empty();
  data.order = node.get("order").text_or_empty();
  data.fold = node.get("fold").text_or_empty();
  for (const Node& item : node.get("dropped").items())
    data.dropped.emplace_back(item.at("column").text(), item.at("rows").count());
  return data;
}

judge::Coverage read_space(const Node& node) {
  judge::Coverage space;
  space.candidates = node.at("candidates").text();
  space.scored = node.at("scored").text();
  space.strategy = node.at("strategy").text();
  if (const Node why = node.get("strategy_why"); why.present()) space.strategy_why = why.text();
  space.proved = node.at("proved").truth();
  space.gap = node.at("gap").number();
  space.complete = node.get("complete").truth(true);
  if (const Node inseparable = node.get("inseparable"); inseparable.present()) space.inseparable = inseparable.text();
  space.pooled = node.get("pooled").count();
  space.examined = node.get("examined").count();
  space.set_aside_direction = node.get("set_aside_direction").count();
  space.set_aside_require = node.get("set_aside_require").count();
  space.pool_formed = node.get("pool_formed").text();
  space.pool_margin = node.get("pool_margin").text();
  space.family_rule = node.get("family_rule").text();
  return space;
}

judge::FoldSummary read_folds(const Node& node) {
  judge::FoldSummary folds;
  folds.count = node.at("count").count();
  folds.repeats = node.at("repeats").count();
  folds.seed = node.at("seed").count();
  folds.kind = node.at("kind").text();
  return folds;
}

judge::PredictorMenu read_menu(const Node& node) {
  judge::PredictorMenu menu;
  menu.column = node.at("column").text();
  menu.always = node.at("always").truth();
  for (const Node& form : node.at("forms").items()) menu.forms.push_back(read_form(form));
  menu.labels = node.at("labels").texts();
  menu.notes = node.at("notes").texts();
  return menu;
}

fit::Coefficient read_coefficient(const Node& node) {
  fit::Coefficient coefficient;
  coefficient.term = node.at("term").text();
  coefficient.value = node.at("value").number();
  coefficient.se = node.at("se").number();
  coefficient.se_robust = node.at("se_robust").number();
  return coefficient;
}

fit::Likelihood read_likelihood(const Node& node) {
  fit::Likelihood likelihood;
  likelihood.log_likelihood = node.at("log_likelihood").number();
  likelihood.aic = node.at("aic").number();
  likelihood.aicc = node.at("aicc").number(kInfinity);  // infinite when there are too few rows for it
  likelihood.bic = node.at("bic").number();
  likelihood.n_parameters = node.get("n_parameters").count();
  return likelihood;
}

judge::CrossValidation read_cv(const Node& node) {
  judge::CrossValidation cv;
  cv.rmse = node.at("rmse").optional_number();
  cv.rmse_se = node.at("rmse_se").optional_number();
  cv.bias = node.at("bias").optional_number();
  cv.mae = node.get("mae").optional_number();
  cv.mae_median = node.at("mae_median").optional_number();
  cv.rmse_form_scale = node.at("rmse_form_scale").number();
  cv.bias_form_scale = node.get("bias_form_scale").number();
  cv.rmse_naive = node.at("rmse_naive").optional_number();
  cv.n_undefined = node.get("n_undefined").count();
  for (const Node& mse : node.get("fold_mse").items()) cv.fold_mse.push_back(mse.number());
  return cv;
}

judge::ValidRange read_range(const Node& node) {
  judge::ValidRange range;
  range.column = node.at("column").text();
  range.seen_min = node.at("seen_min").number();
  range.seen_max = node.at("seen_max").number();
  const Node defined = node.at("defined");
  range.defined.lower = defined.at("lower").number(-kInfinity);
  range.defined.upper = defined.at("upper").number(kInfinity);
  range.defined.lower_closed = defined.at("lower_closed").truth();
  range.defined.upper_closed = defined.at("upper_closed").truth();
  range.levels = node.at("levels").texts();
  return range;
}

judge::Candidate read_candidate(const Node& node, const std::string& response_column) {
  judge::Candidate candidate;
  candidate.rank = node.at("rank").count();
  candidate.number = node.at("candidate").text();
  candidate.marks = node.get("marks").texts();
  candidate.response = read_form(node.at("response"));
  const Node column = node.get("response_column");
  candidate.response_column = column.present() ? column.text() : response_column;
  for (const Node& term : node.at("terms").items())
    candidate.terms.push_back({term.at("column").text(), read_form(term)});
  candidate.equation = node.at("equation").text();
  for (const Node& item : node.at("coefficients").items()) candidate.coefficients.push_back(read_coefficient(item));
  candidate.n = node.at("n").count();
  candidate.rss = node.at("rss").number();
  candidate.sigma = node.at("sigma").number();
  candidate.likelihood = read_likelihood(node);
  candidate.cv = read_cv(node.at("cv"));
  candidate.r2_form_scale = node.at("r_squared").at("form_scale").number();
  candidate.r2_own_units = node.at("r_squared").at("own_units").optional_number();
  for (const Node& check : node.at("checks").items()) candidate.checks.push_back(read_check(check));
  candidate.back = read_back(node.at("back_transformation"));
  for (const Node& range : node.get("ranges").items()) candidate.ranges.push_back(read_range(range));
  candidate.influence = read_influence(node.get("influence"));
  for (const Node& effect : node.get("effects").items()) candidate.effects.push_back(read_effect(effect));
  candidate.pareto = node.get("pareto").truth();
  candidate.siblings = node.get("siblings").texts();
  candidate.cautions = node.at("cautions").texts();
  return candidate;
}

/// A file of another layout must be told apart before its keys are looked for.
void check_schema(const Node& root) {
  const Node schema = root.at("schema");
  const std::uint64_t number = schema.count();
  if (schema.present() && number != static_cast<std::uint64_t>(kShortlistSchema))
    schema.report("is " + std::to_string(number) + ", and this version reads schema " +
                  std::to_string(kShortlistSchema) + " (the file was written by formsieve " +
                  root.get("formsieve").text() + ")");
}

judge::Shortlist read_all(const Node& root) {
  judge::Shortlist shortlist;
  check_schema(root);
  shortlist.formsieve = root.at("formsieve").text();
  shortlist.data = read_data(root.at("data"));
  shortlist.space = read_space(root.at("space"));
  shortlist.folds = read_folds(root.at("folds"));
  shortlist.criterion = read_criterion(root.get("criterion"), judge::Criterion::cv_rmse);
  if (const Node near_tie = root.get("near_tie"); near_tie.present()) shortlist.near_tie = near_tie.number();
  for (const Node& form : root.get("response_forms").items()) shortlist.responses.push_back(read_form(form));
  shortlist.response_notes = root.get("response_notes").texts();
  for (const Node& menu : root.get("menus").items()) shortlist.menus.push_back(read_menu(menu));
  shortlist.summary = read_summary(root, shortlist.responses.size());
  shortlist.proof = read_proof(root, shortlist.responses.size());
  for (const Node& item : root.at("shortlist").items())
    shortlist.candidates.push_back(read_candidate(item, shortlist.data.response));
  shortlist.remarks = root.get("remarks").texts();
  shortlist.cautions = root.get("cautions").texts();
  return shortlist;
}

}  // namespace

Result<judge::Shortlist> read_shortlist_json(const std::string& text, const std::string& path) {
  const auto json = parse_json(text, path);
  if (!json) return json.error();
  if (!json->is_object() || !json->contains("formsieve"))
    return Error{ErrorKind::data, "the file is not a shortlist of formsieve", path,
                 "give the run folder that a search wrote"};
  Trouble trouble(path);
  judge::Shortlist shortlist = read_all(Node(&*json, "", trouble));
  if (trouble.first()) return *trouble.first();
  return shortlist;
}

}  // namespace formsieve::report

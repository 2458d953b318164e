#include "report/examination_reader.hpp"

#include <utility>

namespace formsieve::report {

namespace {

std::optional<checks::Verdict> read_verdict(const Node& node) {
  const std::string word = node.text_or_empty();
  if (word.empty()) return std::nullopt;
  for (const auto verdict : {checks::Verdict::holds, checks::Verdict::strained, checks::Verdict::broken})
    if (word == checks::verdict_word(verdict)) return verdict;
  node.report("is '" + word + "', and a verdict is holds, strained or broken");
  return std::nullopt;
}

checks::CheckPart read_part(const Node& node) {
  checks::CheckPart part;
  part.subject = node.at("subject").text();
  part.statistic = node.at("statistic").optional_number();
  part.p = node.at("p").optional_number();
  part.size = node.at("size").number();
  return part;
}

checks::InfluentialRow read_row(const Node& node) {
  checks::InfluentialRow row;
  row.row = node.at("row").count();
  row.line = node.at("line").count();
  row.leverage = node.at("leverage").number();
  row.cook = node.at("cook").number();
  row.studentised = node.at("studentised").number();
  row.p_bonferroni = node.at("p_bonferroni").number();
  row.prediction_sd = node.at("prediction_sd").number();
  row.moved_term = node.at("moved_term").text();
  row.moved_se = node.at("moved_se").number();
  if (const Node leader = node.at("leader_without"); !leader.is_null()) row.leader_without = leader.count();
  return row;
}

backtransform::Correction read_correction(const Node& node) {
  backtransform::Correction correction;
  correction.method = node.at("method").text();
  correction.factor = node.at("factor").number();
  correction.cv_bias = node.at("cv_bias").optional_number();
  correction.cv_rmse = node.at("cv_rmse").optional_number();
  correction.shift = node.get("shift").optional_number();
  correction.note = node.get("note").text();
  return correction;
}

backtransform::Interval read_interval(const Node& node) {
  backtransform::Interval interval;
  interval.method = node.at("method").text();
  interval.level = node.at("level").number();
  interval.coverage = node.at("coverage").optional_number();
  interval.below = node.at("below").optional_number();
  interval.above = node.at("above").optional_number();
  interval.median_width_own = node.at("median_width_own").optional_number();
  interval.note = node.at("note").text();
  return interval;
}

}  // namespace

checks::Check read_check(const Node& node) {
  checks::Check check;
  check.name = node.at("check").text();
  check.method = node.get("method").text();
  check.hypothesis = node.get("hypothesis").text();
  check.statistic = node.at("statistic").optional_number();
  check.df = node.get("df").optional_number();
  check.df2 = node.get("df2").optional_number();
  check.p = node.at("p").optional_number();
  check.p_adjusted = node.at("p_adjusted").optional_number();
  check.size = node.at("size").number();
  check.size2 = node.get("size2").optional_number();
  check.size_words = node.get("size_words").text();
  check.passes = node.at("passes").truth();
  check.note = node.get("note").text();
  check.verdict = read_verdict(node.get("verdict"));
  for (const Node& part : node.get("parts").items()) check.parts.push_back(read_part(part));
  check.mends = node.get("mends").texts();
  return check;
}

checks::Influence read_influence(const Node& node) {
  checks::Influence influence;
  if (!node.present()) return influence;
  influence.largest_leverage = node.at("largest_leverage").number();
  influence.n_downweighted = node.at("downweighted").count();
  for (const Node& row : node.at("rows").items()) influence.rows.push_back(read_row(row));
  for (const Node& item : node.at("robust").items())
    influence.robust.push_back({item.at("term").text(), item.at("value").number(), item.at("shift_se").number()});
  influence.words = node.at("words").texts();
  return influence;
}

backtransform::Summary read_back(const Node& node) {
  backtransform::Summary back;
  back.smearing_factor = node.at("smearing_factor").number();
  if (const Node used = node.get("used"); used.present()) back.used = used.text();
  back.formula = node.get("formula").text();
  for (const Node& item : node.at("corrections").items()) back.corrections.push_back(read_correction(item));
  back.why_used = node.get("why_used").text();
  back.mean_median_words = node.get("mean_and_median").text();
  for (const Node& item : node.get("intervals").items()) back.intervals.push_back(read_interval(item));
  return back;
}

backtransform::Effect read_effect(const Node& node) {
  backtransform::Effect effect;
  effect.column = node.at("column").text();
  effect.kind = node.at("kind").text();
  effect.from = node.at("from").number();
  effect.to = node.at("to").number();
  effect.from_level = node.at("from_level").text_or_empty();
  effect.to_level = node.at("to_level").text_or_empty();
  effect.at_from = node.at("at_from").optional_number();
  effect.at_to = node.at("at_to").optional_number();
  effect.change = node.at("change").optional_number();
  effect.low = node.at("low").optional_number();
  effect.high = node.at("high").optional_number();
  effect.direction = node.at("direction").text();
  effect.declared = node.at("declared").text_or_empty();
  effect.words = node.at("words").text();
  return effect;
}

}  // namespace formsieve::report

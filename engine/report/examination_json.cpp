#include "report/examination_json.hpp"

namespace formsieve::report {

namespace {

Json part_json(const checks::CheckPart& part) {
  Json json;
  json["subject"] = part.subject;
  json["statistic"] = number_or_null(part.statistic);
  json["p"] = number_or_null(part.p);
  json["size"] = number_or_null(part.size);
  return json;
}

Json row_json(const checks::InfluentialRow& row) {
  Json json;
  json["row"] = count_json(row.row);
  json["line"] = count_json(row.line);
  json["leverage"] = number_or_null(row.leverage);
  json["cook"] = number_or_null(row.cook);
  json["studentised"] = number_or_null(row.studentised);
  json["p_bonferroni"] = number_or_null(row.p_bonferroni);
  json["prediction_sd"] = number_or_null(row.prediction_sd);
  json["moved_term"] = row.moved_term;
  json["moved_se"] = number_or_null(row.moved_se);
  json["leader_without"] = row.leader_without ? Json(count_json(*row.leader_without)) : Json(nullptr);
  return json;
}

Json robust_json(const checks::RobustCoefficient& coefficient) {
  Json json;
  json["term"] = coefficient.term;
  json["value"] = number_or_null(coefficient.value);
  json["shift_se"] = number_or_null(coefficient.shift_se);
  return json;
}

Json correction_json(const backtransform::Correction& correction) {
  Json json;
  json["method"] = correction.method;
  json["factor"] = number_or_null(correction.factor);
  json["cv_bias"] = number_or_null(correction.cv_bias);
  json["cv_rmse"] = number_or_null(correction.cv_rmse);
  json["shift"] = number_or_null(correction.shift);
  json["note"] = correction.note;
  return json;
}

Json interval_json(const backtransform::Interval& interval) {
  Json json;
  json["method"] = interval.method;
  json["level"] = number_or_null(interval.level);
  json["coverage"] = number_or_null(interval.coverage);
  json["below"] = number_or_null(interval.below);
  json["above"] = number_or_null(interval.above);
  json["median_width_own"] = number_or_null(interval.median_width_own);
  json["note"] = interval.note;
  return json;
}

}  // namespace

Json check_json(const checks::Check& check) {
  Json json;
  json["check"] = check.name;
  json["method"] = check.method;
  json["hypothesis"] = check.hypothesis;
  json["statistic"] = number_or_null(check.statistic);
  json["df"] = number_or_null(check.df);
  json["df2"] = number_or_null(check.df2);
  json["p"] = number_or_null(check.p);
  json["p_adjusted"] = number_or_null(check.p_adjusted);
  json["size"] = number_or_null(check.size);
  json["size2"] = number_or_null(check.size2);
  json["size_words"] = check.size_words;
  json["passes"] = check.passes;
  json["note"] = check.note;
  json["verdict"] = check.verdict ? Json(checks::verdict_word(*check.verdict)) : Json(nullptr);
  json["parts"] = list_json(check.parts, part_json);
  json["mends"] = check.mends;
  return json;
}

Json influence_json(const checks::Influence& influence) {
  Json json;
  json["largest_leverage"] = number_or_null(influence.largest_leverage);
  json["downweighted"] = count_json(influence.n_downweighted);
  json["rows"] = list_json(influence.rows, row_json);
  json["robust"] = list_json(influence.robust, robust_json);
  json["words"] = influence.words;
  return json;
}

Json back_json(const backtransform::Summary& back) {
  Json json;
  json["smearing_factor"] = number_or_null(back.smearing_factor);
  json["used"] = back.used;
  json["formula"] = back.formula;
  json["corrections"] = list_json(back.corrections, correction_json);
  json["why_used"] = back.why_used;
  json["mean_and_median"] = back.mean_median_words;
  json["intervals"] = list_json(back.intervals, interval_json);
  return json;
}

Json effect_json(const backtransform::Effect& effect) {
  Json json;
  json["column"] = effect.column;
  json["kind"] = effect.kind;
  json["from"] = number_or_null(effect.from);
  json["to"] = number_or_null(effect.to);
  json["from_level"] = text_or_null(effect.from_level);
  json["to_level"] = text_or_null(effect.to_level);
  json["at_from"] = number_or_null(effect.at_from);
  json["at_to"] = number_or_null(effect.at_to);
  json["change"] = number_or_null(effect.change);
  json["low"] = number_or_null(effect.low);
  json["high"] = number_or_null(effect.high);
  json["direction"] = effect.direction;
  json["declared"] = text_or_null(effect.declared);
  json["words"] = effect.words;
  return json;
}

}  // namespace formsieve::report

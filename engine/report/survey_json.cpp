// survey.json: the profile of every column and what each form would do to it.
#include <formsieve/report.hpp>

#include "report/json_text.hpp"
#include "report/schema.hpp"

namespace formsieve::report {

namespace {

Json levels_json(const forms::ColumnFacts& facts) {
  Json list = Json::array();
  for (std::size_t i = 0; i < facts.levels.size(); ++i) {
    const std::size_t rows = i < facts.level_counts.size() ? facts.level_counts[i] : 0;
    list.push_back({{"level", facts.levels[i]}, {"rows", count_json(rows)}});
  }
  return list;
}

Json trial_json(const survey::FormTrial& trial) {
  Json json;
  json["label"] = trial.label;
  json.update(form_json(trial.form));
  json["possible"] = trial.possible;
  json["reason"] = text_or_null(trial.reason);
  json["repair"] = text_or_null(trial.repair);
  json["skewness_after"] = number_or_null(trial.skewness_after);
  json["suggested"] = trial.suggested;
  json["why"] = text_or_null(trial.why);
  return json;
}

void add_moments(const survey::ColumnProfile& profile, Json& json) {
  const forms::ColumnFacts& facts = profile.facts;
  json["zeros"] = count_json(facts.n_zero);
  json["negatives"] = count_json(facts.n_negative);
  json["whole"] = facts.whole;
  json["resolution"] = number_or_null(facts.resolution);
  json["min"] = number_or_null(facts.min);
  json["q1"] = number_or_null(profile.q1);
  json["median"] = number_or_null(profile.median);
  json["q3"] = number_or_null(profile.q3);
  json["max"] = number_or_null(facts.max);
  json["mean"] = number_or_null(profile.mean);
  json["sd"] = number_or_null(profile.sd);
  json["skewness"] = number_or_null(facts.skewness);
  json["excess_kurtosis"] = number_or_null(profile.excess_kurtosis);
  json["medcouple"] = number_or_null(profile.medcouple);
  json["skew_direction"] = profile.direction;
  json["skew_class"] = std::string(skew_class_name(profile.skew));
  json["outlying"] = count_json(profile.n_outlying);
  json["box_cox_lambda"] = number_or_null(profile.box_cox_lambda);
  json["lower_bound"] = number_or_null(facts.lower_bound);
  json["upper_bound"] = number_or_null(facts.upper_bound);
}

Json column_json(const survey::ColumnProfile& profile) {
  Json json;
  json["column"] = profile.facts.name;
  json["type"] = profile.facts.text ? "text" : "number";
  json["n"] = count_json(profile.facts.n);
  json["missing"] = count_json(profile.n_missing);
  json["distinct"] = count_json(profile.facts.n_distinct);
  json["set_aside"] = profile.set_aside;
  if (profile.facts.text)
    json["levels"] = levels_json(profile.facts);
  else
    add_moments(profile, json);
  json["notes"] = profile.notes;
  json["forms"] = Json::array();
  for (const survey::FormTrial& trial : profile.forms) json["forms"].push_back(trial_json(trial));
  return json;
}

}  // namespace

std::string survey_json(const survey::Survey& survey) {
  Json json;
  json["formsieve"] = version();
  json["schema"] = kSurveySchema;
  json["data"] = {{"file", survey.file}, {"sha256", survey.sha256}, {"rows_read", count_json(survey.n_rows)}};
  json["rare_levels"] = count_json(survey.rare_level_count);
  json["columns"] = Json::array();
  for (const survey::ColumnProfile& profile : survey.columns) json["columns"].push_back(column_json(profile));
  return json_text(json);
}

}  // namespace formsieve::report

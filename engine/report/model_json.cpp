// models.json: what is needed to score new rows, one model a line. A stable contract like shortlist.json: keys are
// added to freely and never renamed; doubles read back to the same bits. Nothing in it depends on the clock or on
// threads.
//
// { "formsieve": "0.1.0", "schema": 1, "response": "energy_kwh", "weight": null, "models": [
//   { "rank", "candidate", "marks", "equation", "response": { form },
//     "terms": [ { "column", form, "seen_min", "seen_max", "defined" } ],
//     "coefficients": [p], "root": [p(p+1)/2], "sigma", "n", "largest_leverage",
//     "mean": { "method", "cuts", "parts": [ { "factor", "smallest", "first", …, "residuals" } ] },
//     "folds": [ { "coefficients", "residuals", "counts" } ] } ] }
//
// The members are explained in formsieve/model.hpp.
#include <formsieve/report.hpp>

#include "report/form_reader.hpp"
#include "report/json_reader.hpp"
#include "report/json_text.hpp"

#include <limits>

namespace formsieve::report {

namespace {

constexpr std::uint64_t kModelsSchema = 1;
constexpr double kInfinity = std::numeric_limits<double>::infinity();

Json numbers_json(const std::vector<double>& values) {
  return list_json(values, [](double value) { return number_or_null(value); });
}

Json term_json(const model::Term& term) {
  Json json;
  json["column"] = term.column;
  json.update(form_json(term.form));
  json["seen_min"] = number_or_null(term.seen_min);
  json["seen_max"] = number_or_null(term.seen_max);
  json["defined"] = {{"lower", number_or_null(term.defined.lower)},
                     {"upper", number_or_null(term.defined.upper)},
                     {"lower_closed", term.defined.lower_closed},
                     {"upper_closed", term.defined.upper_closed}};
  return json;
}

Json part_json(const model::MeanPart& part) {
  Json json;
  json["factor"] = number_or_null(part.factor);
  json["smallest"] = number_or_null(part.smallest);
  json["first"] = number_or_null(part.first);
  json["second"] = number_or_null(part.second);
  json["third"] = number_or_null(part.third);
  json["mean_exp"] = number_or_null(part.mean_exp);
  json["mean_cosh"] = number_or_null(part.mean_cosh);
  json["mean_sinh"] = number_or_null(part.mean_sinh);
  json["residuals"] = numbers_json(part.residuals);
  return json;
}

Json fold_json(const model::Fold& fold) {
  Json json;
  json["coefficients"] = numbers_json(fold.coefficients);
  json["residuals"] = numbers_json(fold.residuals);
  json["counts"] = list_json(fold.counts, count_json);
  return json;
}

Json model_json(const model::Model& model) {
  Json json;
  json["rank"] = count_json(model.rank);
  json["candidate"] = model.number;
  json["marks"] = model.marks;
  json["equation"] = model.equation;
  json["response"] = form_json(model.response);
  json["terms"] = list_json(model.terms, term_json);
  json["coefficients"] = numbers_json(model.coefficients);
  json["root"] = numbers_json(model.root);
  json["sigma"] = number_or_null(model.sigma);
  json["n"] = count_json(model.n);
  json["largest_leverage"] = number_or_null(model.largest_leverage);
  json["mean"]["method"] = model.mean.method;
  json["mean"]["cuts"] = numbers_json(model.mean.cuts);
  json["mean"]["parts"] = list_json(model.mean.parts, part_json);
  json["folds"] = list_json(model.folds, fold_json);
  return json;
}

std::string one_line(const Json& json) { return json.dump(-1, ' ', false, Json::error_handler_t::replace); }

std::vector<double> read_numbers(const Node& node) {
  std::vector<double> values;
  for (const Node& item : node.items()) values.push_back(item.number());
  return values;
}

model::Term read_term(const Node& node) {
  model::Term term;
  term.column = node.at("column").text();
  term.form = read_form(node);
  term.seen_min = node.at("seen_min").number();
  term.seen_max = node.at("seen_max").number();
  const Node defined = node.at("defined");
  term.defined = {defined.at("lower").number(-kInfinity), defined.at("upper").number(kInfinity),
                  defined.at("lower_closed").truth(), defined.at("upper_closed").truth()};
  return term;
}

model::MeanPart read_part(const Node& node) {
  model::MeanPart part;
  part.factor = node.at("factor").optional_number();
  part.smallest = node.at("smallest").number();
  part.first = node.at("first").number();
  part.second = node.at("second").number();
  part.third = node.at("third").number();
  part.mean_exp = node.at("mean_exp").number();
  part.mean_cosh = node.at("mean_cosh").number();
  part.mean_sinh = node.at("mean_sinh").number();
  part.residuals = read_numbers(node.at("residuals"));
  return part;
}

model::Fold read_fold(const Node& node) {
  model::Fold fold;
  fold.coefficients = read_numbers(node.at("coefficients"));
  fold.residuals = read_numbers(node.at("residuals"));
  for (const Node& item : node.at("counts").items()) fold.counts.push_back(item.count());
  return fold;
}

model::Model read_model(const Node& node) {
  model::Model model;
  model.rank = node.at("rank").count();
  model.number = node.at("candidate").text();
  model.marks = node.at("marks").texts();
  model.equation = node.at("equation").text();
  model.response = read_form(node.at("response"));
  for (const Node& term : node.at("terms").items()) model.terms.push_back(read_term(term));
  model.coefficients = read_numbers(node.at("coefficients"));
  model.root = read_numbers(node.at("root"));
  model.sigma = node.at("sigma").number();
  model.n = node.at("n").count();
  model.largest_leverage = node.at("largest_leverage").number();
  const Node mean = node.at("mean");
  model.mean.method = mean.at("method").text();
  model.mean.cuts = read_numbers(mean.at("cuts"));
  for (const Node& part : mean.at("parts").items()) model.mean.parts.push_back(read_part(part));
  for (const Node& fold : node.at("folds").items()) model.folds.push_back(read_fold(fold));
  return model;
}

}  // namespace

std::string models_json(const model::ModelSet& set) {
  Json head;
  head["formsieve"] = set.formsieve;
  head["schema"] = kModelsSchema;
  head["response"] = set.response;
  head["weight"] = text_or_null(set.weight);
  std::string text = one_line(head);
  text.pop_back();
  text += ",\"models\":[";
  for (std::size_t i = 0; i < set.models.size(); ++i)
    text += (i == 0 ? "\n" : ",\n") + one_line(model_json(set.models[i]));
  return text + "\n]}\n";
}

Result<model::ModelSet> read_models_json(const std::string& text, const std::string& path) {
  const auto json = parse_json(text, path);
  if (!json) return json.error();
  if (!json->is_object() || !json->contains("models"))
    return Error{ErrorKind::data, "the file holds no models of formsieve", path,
                 "give the run folder that a search wrote"};
  Trouble trouble(path);
  const Node root(&*json, "", trouble);
  const Node schema = root.at("schema");
  if (schema.count() != kModelsSchema)
    schema.report("is " + std::to_string(schema.count()) + ", and this version reads schema " +
                  std::to_string(kModelsSchema));
  model::ModelSet set;
  set.formsieve = root.at("formsieve").text();
  set.response = root.at("response").text();
  set.weight = root.at("weight").text_or_empty();
  for (const Node& model : root.at("models").items()) set.models.push_back(read_model(model));
  if (trouble.first()) return *trouble.first();
  return set;
}

}  // namespace formsieve::report

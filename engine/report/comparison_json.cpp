// A comparison as JSON: the same figures as on the screen, with all their digits.
#include <formsieve/report.hpp>

#include "report/json_text.hpp"

namespace formsieve::report {

namespace {

Json check_json(const checks::Check& check) {
  Json json;
  json["check"] = check.name;
  json["size"] = number_or_null(check.size);
  json["size_words"] = check.size_words;
  json["p_adjusted"] = number_or_null(check.p_adjusted);
  json["passes"] = check.passes;
  return json;
}

Json bias_json(const judge::RemainingBias& bias) {
  Json json;
  json["correction"] = bias.correction;
  json["bias"] = number_or_null(bias.bias);
  json["bias_rel"] = number_or_null(bias.bias_rel);
  json["words"] = bias.words;
  return json;
}

Json candidate_json(const judge::Candidate& candidate, const judge::RemainingBias& bias) {
  Json json;
  json["rank"] = count_json(candidate.rank);
  json["candidate"] = candidate.number;
  json["marks"] = candidate.marks;
  json["response"] = forms::term_name(candidate.response, candidate.response_column);
  json["terms"] = list_json(candidate.terms, [](const judge::Term& term) {
    Json entry;
    entry["column"] = term.column;
    entry["term"] = forms::term_name(term.form, term.column);
    return entry;
  });
  json["equation"] = candidate.equation;
  json["cv_rmse"] = number_or_null(candidate.cv.rmse);
  json["cv_rmse_se"] = number_or_null(candidate.cv.rmse_se);
  json["aic"] = number_or_null(candidate.likelihood.aic);
  json["bic"] = number_or_null(candidate.likelihood.bic);
  json["coefficients"] = count_json(candidate.coefficients.size());
  json["r_squared_own_units"] = number_or_null(candidate.r2_own_units);
  json["checks"] = list_json(candidate.checks, check_json);
  json["remaining_bias"] = bias_json(bias);
  return json;
}

Json folds_json(const judge::FoldDifference& folds) {
  Json json;
  json["folds"] = count_json(folds.n_folds);
  json["first_lower"] = count_json(folds.n_first_lower);
  json["second_lower"] = count_json(folds.n_second_lower);
  json["mse"] = number_or_null(folds.mse);
  json["mse_se"] = number_or_null(folds.mse_se);
  json["rmse"] = number_or_null(folds.rmse);
  json["rmse_se"] = number_or_null(folds.rmse_se);
  json["t"] = number_or_null(folds.t);
  json["df"] = number_or_null(folds.df);
  json["p"] = number_or_null(folds.p);
  json["beyond_noise"] = folds.beyond_noise;
  json["words"] = folds.words;
  return json;
}

std::string nesting_name(judge::Nesting nesting) {
  switch (nesting) {
    case judge::Nesting::first_in_second:
      return "first in second";
    case judge::Nesting::second_in_first:
      return "second in first";
    case judge::Nesting::same:
      return "same";
    case judge::Nesting::none:
      break;
  }
  return "not nested";
}

Json likelihood_json(const judge::LikelihoodDifference& likelihood) {
  Json json;
  json["nesting"] = nesting_name(likelihood.nesting);
  json["log_likelihood"] = number_or_null(likelihood.log_likelihood);
  json["vuong"] = {{"z", number_or_null(likelihood.z)},         {"p", number_or_null(likelihood.p)},
                   {"z_aic", number_or_null(likelihood.z_aic)}, {"p_aic", number_or_null(likelihood.p_aic)},
                   {"z_bic", number_or_null(likelihood.z_bic)}, {"p_bic", number_or_null(likelihood.p_bic)}};
  json["nested"] = {{"f", number_or_null(likelihood.f)},
                    {"df", number_or_null(likelihood.df)},
                    {"df2", number_or_null(likelihood.df2)},
                    {"p", number_or_null(likelihood.p_f)}};
  json["beyond_noise"] = likelihood.beyond_noise;
  json["words"] = likelihood.words;
  return json;
}

Json linear_log_json(const judge::LinearLogTest& test) {
  Json json;
  json["linear"] = test.first_is_linear ? "first" : "second";
  json["against_linear"] = {{"t", number_or_null(test.t_linear)},
                            {"df", number_or_null(test.df_linear)},
                            {"p", number_or_null(test.p_linear)}};
  json["against_log_linear"] = {
      {"t", number_or_null(test.t_log)}, {"df", number_or_null(test.df_log)}, {"p", number_or_null(test.p_log)}};
  json["words"] = test.words;
  return json;
}

Json disagreement_json(const judge::Disagreement& disagreement) {
  Json json;
  json["root_mean_square"] = number_or_null(disagreement.root_mean_square_own);
  json["root_mean_square_rel"] = number_or_null(disagreement.root_mean_square_rel);
  json["line"] = count_json(disagreement.line);
  json["measured"] = number_or_null(disagreement.measured_own);
  json["first"] = number_or_null(disagreement.first_own);
  json["second"] = number_or_null(disagreement.second_own);
  json["difference_rel"] = number_or_null(disagreement.difference_rel);
  json["values"] = Json::object();
  for (const auto& [column, value] : disagreement.values) json["values"][column] = value;
  json["words"] = disagreement.words;
  return json;
}

template <class Part, class Writer>
Json part_or_null(const std::optional<Part>& part, Writer&& writer) {
  return part ? writer(*part) : Json();
}

Json pair_json(const judge::PairComparison& pair, const judge::Comparison& comparison) {
  Json json;
  json["first"] = count_json(comparison.candidates[pair.first].rank);
  json["second"] = count_json(comparison.candidates[pair.second].rank);
  json["folds"] = folds_json(pair.folds);
  json["likelihood"] = part_or_null(pair.likelihood, likelihood_json);
  json["linear_log"] = part_or_null(pair.linear_log, linear_log_json);
  json["disagreement"] = part_or_null(pair.disagreement, disagreement_json);
  return json;
}

}  // namespace

std::string comparison_json(const judge::Comparison& comparison) {
  Json json;
  json["formsieve"] = comparison.formsieve;
  json["data"] = {{"file", comparison.data.file}, {"response", comparison.data.response}};
  json["candidates"] = Json::array();
  for (std::size_t i = 0; i < comparison.candidates.size(); ++i)
    json["candidates"].push_back(candidate_json(comparison.candidates[i], comparison.bias[i]));
  json["pairs"] = list_json(comparison.pairs, [&](const auto& pair) { return pair_json(pair, comparison); });
  json["missing"] = comparison.missing;
  json["cautions"] = comparison.cautions;
  return json_text(json);
}

}  // namespace formsieve::report

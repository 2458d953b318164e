#include "pipeline/refit.hpp"

#include <formsieve/pipeline.hpp>

#include "backtransform/corrections.hpp"
#include "base/parallel.hpp"
#include "judge/comparison.hpp"
#include "judge/words.hpp"
#include "run/folder.hpp"

#include <numeric>
#include <optional>

namespace formsieve::pipeline {

namespace {

Error changed_table(const judge::DataSummary& recorded, const std::string& what) {
  return {ErrorKind::data, "the table " + recorded.file + " is not the one that was searched: " + what, "",
          "put the table of the run back, or search again"};
}

bool same_candidate(const judge::Candidate& recorded, const design::Data& data, const search::Choice& choice) {
  if (!(data.response_forms[choice.response] == recorded.response)) return false;
  std::vector<judge::Term> terms;
  for (std::size_t j = 0; j < choice.choice.size(); ++j)
    if (choice.choice[j] != 0)
      terms.push_back({data.predictors[j].column, data.predictors[j].menu[choice.choice[j] - 1]});
  if (terms.size() != recorded.terms.size()) return false;
  for (std::size_t k = 0; k < terms.size(); ++k)
    if (terms[k].column != recorded.terms[k].column || !(terms[k].form == recorded.terms[k].form)) return false;
  return true;
}

Result<search::Choice> choice_of(const Prepared& prepared, const judge::Candidate& recorded) {
  const auto choice = search::choice_of(prepared.space, search::BigCount(recorded.number));
  if (choice && same_candidate(recorded, prepared.data, *choice)) return *choice;
  return Error{ErrorKind::data,
               "candidate " + recorded.number + " of the run is another one in the space that its plan now gives", "",
               "search again with this version"};
}

/// The correction that the run says is in use; smearing, the default, where this version does not know it.
backtransform::Method method_in_use(const judge::Candidate& recorded) {
  for (const backtransform::Method method : backtransform::methods_for(recorded.response))
    if (backtransform::method_name(method) == recorded.back.used) return method;
  return backtransform::Method::smearing;
}

Result<Refit> refit_one(const Prepared& prepared, const judge::Candidate& recorded) {
  const auto choice = choice_of(prepared, recorded);
  if (!choice) return choice.error();
  const design::Data& data = prepared.data;
  std::vector<std::size_t> rows(data.n_rows);
  std::iota(rows.begin(), rows.end(), std::size_t{0});
  const Eigen::VectorXd weights =
      Eigen::Map<const Eigen::VectorXd>(data.weights.data(), static_cast<Eigen::Index>(data.weights.size()));
  Refit result;
  result.x = design::design_matrix(data, choice->choice, rows);
  result.response = design::response_vector(data, choice->response, rows);
  auto fit = fit::least_squares(result.x, result.response, weights);
  if (!fit) return fit.error();
  result.fit = std::move(*fit);
  const Eigen::Map<const Eigen::VectorXd> measured(data.response.data(), static_cast<Eigen::Index>(data.n_rows));
  const auto correction = backtransform::make_correction(
      method_in_use(recorded), {recorded.response, result.fit.fitted, result.fit.residuals, weights, measured,
                                result.fit.sigma, static_cast<double>(result.x.rows() - result.x.cols())});
  std::vector<double> log_derivative(data.n_rows);
  for (std::size_t i = 0; i < data.n_rows; ++i) {
    const double weight = data.weights.empty() ? 1.0 : data.weights[i];
    const auto row = static_cast<Eigen::Index>(i);
    result.mean_own.push_back(correction->mean({result.fit.fitted[row], result.fit.leverage[row] / weight, weight}));
    log_derivative[i] = forms::log_abs_derivative(recorded.response, data.response[i]);
  }
  result.log_density =
      judge::pointwise_log_likelihood({result.fit.residuals.data(), data.n_rows}, data.weights, log_derivative);
  return result;
}

}  // namespace

Result<Prepared> prepare_again(const std::string& run_folder, const judge::DataSummary& recorded, unsigned threads) {
  const auto folder = run::RunFolder::open(run_folder);
  if (!folder) return folder.error();
  const auto plan = run::read_plan(folder->file(run::kPlanFile));
  if (!plan) return plan.error();
  auto table = load_table(*plan, threads);
  if (!table) return table.error();
  if (table->sha256 != recorded.sha256)
    return changed_table(recorded, "its SHA-256 is " + table->sha256.substr(0, 12) + "…, that of the run " +
                                       recorded.sha256.substr(0, 12) + "…");
  auto prepared = prepare(std::move(*table), *plan);
  if (prepared && prepared->summary.rows_used != recorded.rows_used)
    return changed_table(recorded, judge::counted(prepared->summary.rows_used, "row") + " would be used, not " +
                                       judge::grouped_digits(std::to_string(recorded.rows_used)));
  return prepared;
}

Result<std::vector<Refit>> refit(const Prepared& prepared, const std::vector<judge::Candidate>& recorded,
                                 unsigned threads) {
  std::vector<std::optional<Result<Refit>>> results(recorded.size());
  base::parallel_for(recorded.size(), threads, [&](std::size_t i) { results[i] = refit_one(prepared, recorded[i]); });
  std::vector<Refit> refits;
  for (auto& result : results) {
    if (!*result) return result->error();
    refits.push_back(std::move(**result));
  }
  return refits;
}

std::string cell_text(const table::Table& table, const std::string& name, std::size_t row) {
  const auto index = table.find(name);
  if (!index) return {};
  const table::Column& column = table.columns[*index];
  if (column.type == table::ColumnType::numeric) return judge::exact_words(column.numbers[row]);
  return column.codes[row] < column.levels.size() ? column.levels[column.codes[row]] : std::string();
}

}  // namespace formsieve::pipeline

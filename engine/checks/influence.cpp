#include "checks/influence.hpp"

#include "checks/leave_out.hpp"
#include "checks/workings.hpp"

#include <algorithm>
#include <cmath>

namespace formsieve::checks {

namespace {

using Eigen::Index;

/// Figures of every row that the choice needs.
struct RowFigures {
  Eigen::VectorXd cook, studentised;
};

RowFigures figures_of(const Subject& subject) { return {cook_distances(subject), externally_studentised(subject)}; }

/// The `count` rows of the largest values, largest first, ties by row. Cost O(n).
std::vector<Index> largest_rows(const Eigen::VectorXd& values, std::size_t count) {
  std::vector<Index> rows(static_cast<std::size_t>(values.size()));
  for (std::size_t i = 0; i < rows.size(); ++i) rows[i] = static_cast<Index>(i);
  count = std::min(count, rows.size());
  const auto before = [&](Index a, Index b) { return values[a] > values[b] || (values[a] == values[b] && a < b); };
  std::partial_sort(rows.begin(), rows.begin() + static_cast<std::ptrdiff_t>(count), rows.end(), before);
  rows.resize(count);
  return rows;
}

bool is_full(const Subject& subject, Index row) { return subject.leverage[row] >= kFullLeverage; }

std::vector<Index> chosen_rows(const Workings& workings, const RowFigures& figures) {
  const Subject& subject = workings.subject;
  std::vector<Index> rows;
  const auto add = [&](Index row) {
    if (rows.size() < kMostInfluential && std::find(rows.begin(), rows.end(), row) == rows.end()) rows.push_back(row);
  };
  const Index farthest = largest_rows(subject.leverage, 1).front();
  const double average = static_cast<double>(workings.p) / static_cast<double>(workings.n);
  if (is_far(subject.leverage[farthest], average)) add(farthest);
  for (const Index row : largest_rows(figures.cook, kByCook)) add(row);
  for (const Index row : largest_rows(figures.studentised.cwiseAbs(), kMostInfluential))
    if (outlier_p(subject, figures.studentised[row]).value_or(1.0) < kLevel) add(row);
  const auto before = [&](Index a, Index b) {
    if (is_full(subject, a) != is_full(subject, b)) return is_full(subject, a);
    return figures.cook[a] > figures.cook[b] || (figures.cook[a] == figures.cook[b] && a < b);
  };
  std::sort(rows.begin(), rows.end(), before);
  return rows;
}

/// The coefficient that moves most, or rests most on a row of full leverage.
void set_move(const Workings& workings, const Eigen::MatrixXd& root, Index row,
              std::span<const fit::Coefficient> coefficients, InfluentialRow& one) {
  Eigen::VectorXd moves = coefficient_moves_se(workings, root, row);
  if (is_full(workings.subject, row)) {
    moves = (root * workings.of_the_fit().q.row(row).transpose()).cwiseQuotient(root.rowwise().norm());
    moves[0] = 0.0;  // the intercept is where the others left it
  }
  Index at = 0;
  moves.cwiseAbs().maxCoeff(&at);
  if (static_cast<std::size_t>(at) < coefficients.size())
    one.moved_term = coefficients[static_cast<std::size_t>(at)].term;
  one.moved_se = is_full(workings.subject, row) ? 0.0 : moves[at];
}

std::vector<RobustCoefficient> shifts(const Workings& workings, const Eigen::MatrixXd& root,
                                      std::span<const fit::Coefficient> coefficients, const Insensitive& robust) {
  std::vector<RobustCoefficient> result;
  if (robust.coefficients.size() != workings.p || coefficients.size() != static_cast<std::size_t>(workings.p))
    return {};
  const Eigen::VectorXd se = workings.subject.sigma * root.rowwise().norm();
  for (Index j = 0; j < workings.p; ++j) {
    const auto& plain = coefficients[static_cast<std::size_t>(j)];
    result.push_back({plain.term, robust.coefficients[j], (robust.coefficients[j] - plain.value) / se[j]});
  }
  return result;
}

}  // namespace

bool is_far(double leverage, double average) {
  return leverage >= kFullLeverage || (leverage > kRiskyLeverage && leverage > kFarLeverage * average);
}

Influence influence(const Workings& workings, std::span<const fit::Coefficient> coefficients,
                    const std::optional<Insensitive>& robust) {
  Influence result;
  const Subject& subject = workings.subject;
  if (!workings.untestable.empty() || !(subject.sigma > 0.0) || !subject.leverage.allFinite() ||
      !workings.of_the_fit().full_rank)
    return result;
  const RowFigures figures = figures_of(subject);
  const Eigen::MatrixXd root = inverse_root(workings);
  result.largest_leverage = subject.leverage.maxCoeff();
  for (const Index row : chosen_rows(workings, figures)) {
    InfluentialRow one;
    one.row = static_cast<std::size_t>(row);
    one.line = one.row < subject.lines.size() ? subject.lines[one.row] : 0;
    one.leverage = subject.leverage[row];
    one.cook = figures.cook[row];
    one.studentised = figures.studentised[row];
    one.p_bonferroni = outlier_p(subject, one.studentised).value_or(1.0);
    one.prediction_sd = largest_prediction_change(workings, row);
    set_move(workings, root, row, coefficients, one);
    result.rows.push_back(std::move(one));
  }
  if (robust) {
    result.robust = shifts(workings, root, coefficients, *robust);
    result.n_downweighted = result.robust.empty() ? 0 : robust->n_downweighted;
  }
  result.words = influence_words(result, static_cast<std::size_t>(workings.n), static_cast<std::size_t>(workings.p),
                                 robust ? robust->method : "");
  return result;
}

Influence influence(const Subject& subject, std::span<const fit::Coefficient> coefficients,
                    const std::optional<Insensitive>& robust) {
  return influence(prepare(subject), coefficients, robust);
}

Findings examine(const Subject& subject, std::span<const fit::Coefficient> coefficients,
                 const std::optional<Insensitive>& robust) {
  const Workings workings = prepare(subject);
  return {run_all(workings), influence(workings, coefficients, robust)};
}

}  // namespace formsieve::checks

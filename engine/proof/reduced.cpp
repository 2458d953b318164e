#include "proof/reduced.hpp"

#include <Eigen/Cholesky>

#include <bit>
#include <cmath>
#include <limits>

namespace formsieve::proof {

namespace {

using Columns = std::vector<std::size_t>;

/// A form is dropped for a pivot below this share of its column: a little below search::kSmallestPivot_rel, so that
/// rounding here drops none that the canonical score would admit. Those in between are met and not listed.
constexpr double kDroppedPivot_rel = 0.9 * search::kSmallestPivot_rel;
/// Only forms of which less than this is left are tried one by one with the fixed columns. Well above the limit, since
/// a pivot in plan order is at least what is left after all fixed columns.
constexpr double kSuspectPivot_rel = 1e-5;
constexpr double kUnitRoundoff = std::numeric_limits<double>::epsilon() / 2;

void append(const search::FormBlock& block, Columns& columns) {
  for (std::size_t c = 0; c < block.n_columns; ++c) columns.push_back(block.first_column + c);
}

/// Sorts the predictors into decided and open ones; fills all of `reduced` but its numbers.
void sort_out(const RootGram& root, std::span<const Actions> actions, Reduced& reduced, Columns& fixed, Columns& open) {
  reduced.fixed.assign(actions.size(), 0);
  for (std::size_t j = 0; j < actions.size(); ++j) {
    const search::PredictorChoices& predictor = root.space().predictors[j];
    if (std::has_single_bit(actions[j])) {
      const auto choice = static_cast<std::uint16_t>(std::countr_zero(actions[j]));
      reduced.fixed[j] = choice;
      if (choice == 0) continue;
      append(predictor.forms[choice - 1u], fixed);
      ++reduced.fixed_terms;
      continue;
    }
    OpenPredictor entry;
    entry.predictor = j;
    entry.must = (actions[j] & 1) == 0;
    entry.first = static_cast<Eigen::Index>(open.size());
    for (std::size_t f = 0; f < predictor.forms.size(); ++f) {
      if ((actions[j] >> (f + 1) & 1) == 0) continue;
      entry.forms.push_back(
          {f, static_cast<Eigen::Index>(open.size()), static_cast<Eigen::Index>(predictor.forms[f].n_columns), true});
      append(predictor.forms[f], open);
    }
    entry.n_columns = static_cast<Eigen::Index>(open.size()) - entry.first;
    reduced.open.push_back(std::move(entry));
  }
  reduced.fixed_columns = fixed.size();
}

/// Projects the fixed columns out of M, b and yy, which hold the root's entries. With W = L⁻¹ G_FU, M − WᵀW; an error E
/// of the entries of the Gram changes M_xy by E_xy − α_xᵀE_Fy − E_xFα_y + α_xᵀE_FFα_y, α = G_FF⁻¹G_Fx, and the
/// factorisation is that of a Gram with errors of at most γ_{k+1} (Higham 2002, theorem 10.3; |L||L|ᵀ ≤ 1 here).
void project_out(const RootGram& root, const Columns& fixed, const Columns& open, Reduced& reduced) {
  const auto& products = root.products(reduced.response);
  const auto k = static_cast<Eigen::Index>(fixed.size());
  const Eigen::LLT<Eigen::MatrixXd> factor(root.gram()(fixed, fixed));
  reduced.separable =
      factor.info() == Eigen::Success && factor.matrixLLT().diagonal().array().square().minCoeff() > kDroppedPivot_rel;
  if (!reduced.separable) return;
  Eigen::MatrixXd w(k, reduced.b.size() + 1);
  w.leftCols(reduced.b.size()) = root.gram()(fixed, open);
  w.rightCols(1) = products(fixed);
  factor.matrixL().solveInPlace(w);
  const auto w_open = w.leftCols(reduced.b.size());
  const auto w_response = w.rightCols(1).col(0);
  reduced.m.selfadjointView<Eigen::Lower>().rankUpdate(w_open.transpose(), -1.0);
  reduced.m.triangularView<Eigen::StrictlyUpper>() = reduced.m.transpose();
  reduced.b.noalias() -= w_open.transpose() * w_response;
  reduced.yy -= w_response.squaredNorm();
  factor.matrixU().solveInPlace(w);
  const double amplified = 1.0 + w.cwiseAbs().colwise().sum().maxCoeff();
  reduced.entry_error += 4.0 * static_cast<double>(k + 3) * kUnitRoundoff * amplified * amplified;
}

/// Marks the open forms that no separable candidate of the node has.
void mark_inseparable(const RootGram& root, Reduced& reduced) {
  CandidateScorer scorer(root);
  std::vector<std::uint16_t> choice = reduced.fixed;
  for (OpenPredictor& predictor : reduced.open) {
    for (OpenForm& form : predictor.forms) {
      if (reduced.m.diagonal().segment(form.first, form.n_columns).minCoeff() > kSuspectPivot_rel) continue;
      choice[predictor.predictor] = static_cast<std::uint16_t>(form.form + 1);
      form.separable = scorer.separable(choice, kDroppedPivot_rel);
    }
    choice[predictor.predictor] = 0;
  }
}

}  // namespace

Reduced reduce(const RootGram& root, std::size_t response, std::span<const Actions> actions) {
  Reduced reduced;
  reduced.response = response;
  Columns fixed;
  Columns open;
  sort_out(root, actions, reduced, fixed, open);
  reduced.m = root.gram()(open, open);
  reduced.b = root.products(response)(open);
  reduced.entry_error = 4.0 * kUnitRoundoff;  // the scaling to unit length
  if (!fixed.empty()) project_out(root, fixed, open, reduced);
  if (reduced.separable) mark_inseparable(root, reduced);
  return reduced;
}

}  // namespace formsieve::proof

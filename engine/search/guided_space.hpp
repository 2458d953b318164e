// The space as the guided search meets it: its forms in one row, what a candidate may change into, and what a descent
// minimises.
#pragma once

#include "base/gram.hpp"
#include "search/candidate_fit.hpp"
#include "search/space.hpp"

#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

namespace formsieve::search {

/// Choices of one candidate, [n_predictors]; they compare as the candidates' numbers do.
using Choices = std::vector<std::uint16_t>;

/// One form of one predictor.
struct OpenForm {
  std::size_t predictor = 0;
  std::uint16_t choice = 1;  ///< 1 + form index
  std::size_t first_column = 0;
  std::size_t n_columns = 1;
  std::uint64_t key = 0;  ///< random, by which candidates are hashed
};

class GuidedSpace {
 public:
  explicit GuidedSpace(const Space& space);

  const Space& space() const { return space_; }
  std::span<const OpenForm> forms() const { return forms_; }
  /// Forms of predictor j are first_form(j) … first_form(j + 1) − 1.
  std::size_t first_form(std::size_t predictor) const { return first_form_[predictor]; }
  const OpenForm& form(std::size_t predictor, std::uint16_t choice) const {
    return forms_[first_form_[predictor] + choice - 1u];
  }
  std::size_t n_predictors() const { return space_.predictors.size(); }
  bool always(std::size_t predictor) const { return space_.predictors[predictor].always; }
  std::size_t n_always() const { return n_always_; }
  std::size_t most_terms() const { return most_terms_; }
  /// False when no candidate exists: max_terms below the predictors that are always in, or one of these without a form.
  bool any() const { return any_; }

  /// XOR of the keys of a candidate's response and forms.
  std::uint64_t hash(std::size_t response, const Choices& choices) const;

 private:
  const Space& space_;
  std::vector<OpenForm> forms_;
  std::vector<std::size_t> first_form_;  ///< [n_predictors + 1]
  std::vector<std::uint64_t> response_key_;
  std::size_t n_always_ = 0, most_terms_ = 0;
  bool any_ = true;
};

/// One fold of what is minimised. Matrices are those of the GramSet, not copied.
struct ObjectiveFold {
  const double* a;  ///< training, column c at c · a_order
  std::size_t a_order;
  const double* v;  ///< validation, column c at c · v_order
  std::size_t v_order;
  /// [width] each, padded with zeros: both diagonals and, of the response (in own units V of the working response
  /// y + δ), both rows.
  const double *a_diagonal, *v_diagonal, *a_y, *v_y;
  const double* least;  ///< [width] what a pivot must exceed
  double v_yy;
};

/// What a descent minimises: held-out SSE of one response form, on its scale or in own units to first order (the
/// working response of base::GramSet::OwnUnits). With the response y in V replaced by y + δ, whose part δ no column
/// reduces, the second is the V_yy of the same elimination.
class Objective {
 public:
  /// `own` null: held-out SSE on the form's scale. The Gram matrices must outlive it.
  Objective(const base::GramSet& grams, std::size_t response, const base::GramSet::OwnUnits* own);
  Objective(Objective&&) = default;

  std::size_t response() const { return response_; }
  bool in_own_units() const { return own_ != nullptr; }
  std::size_t n_folds() const { return grams_.n_folds; }
  std::size_t width() const { return width_; }
  const base::GramSet& grams() const { return grams_; }
  ObjectiveFold fold(std::size_t f) const;
  /// A sum here times this is on the form's scale or in own units, squared.
  double unit() const { return unit_; }
  /// Improvements up to this (in those units) are rounding: the sum without any predictor times kRounding_rel.
  double rounding() const { return rounding_; }

  /// The canonical figure of one candidate: the same bits however it was met; infinite where it is inseparable in a
  /// fold or on all rows. Cost O(folds · k³).
  double score(const GuidedSpace& space, const Choices& choices, CandidateFit& fit) const;

 private:
  ObjectiveFold matrices(std::size_t f) const;
  std::vector<double> rows(const ObjectiveFold& fold) const;

  const base::GramSet& grams_;
  std::size_t response_;
  const base::GramSet::OwnUnits* own_;
  std::size_t width_;                      ///< n_columns, padded to the kernels' grain
  std::vector<std::vector<double>> rows_;  ///< [fold][5 · width] as in ObjectiveFold
  double unit_ = 1.0, rounding_ = 0.0;
};

}  // namespace formsieve::search

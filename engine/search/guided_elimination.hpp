// One fold with the columns of a candidate eliminated, one at a time and last in, first out: what is left of every
// other column, hence the held-out SSE of the candidate with any one more form.
//
// Only the pivots' rows and what is left of the diagonals are kept (walk.hpp names the elimination): the row of pivot i
// is reduced by the i pivots before it when it is met, so that k pivots cost O(k² · columns), not O(k · columns²).
#pragma once

#include "search/guided_kernel.hpp"
#include "search/guided_space.hpp"

#include <cstddef>
#include <vector>

namespace formsieve::search {

/// Dense symmetric matrices of a few columns and, last, the response, for eliminations one after another. Memory grows
/// to the largest and stays.
class SmallFold {
 public:
  /// `order` counts the response; entries are then filled by the caller, i ≥ j alone.
  void resize(std::size_t order);
  double& a(std::size_t i, std::size_t j) { return a_[i * stride_ + j]; }
  double& v(std::size_t i, std::size_t j) { return v_[i * stride_ + j]; }
  double sse() const { return v_[(order_ - 1) * (stride_ + 1)]; }
  /// Brings column c in; those before it must be in or are lost. False when its pivot is not above `least`.
  bool eliminate(std::size_t c, double least);

 private:
  std::size_t order_ = 0, stride_ = 0;
  std::vector<double> a_, v_, scratch_;
};

/// What is left of the columns of a fold.
class OpenState {
 public:
  explicit OpenState(std::size_t width) : rows_(4 * width), width_(width) {}
  OpenColumns columns() { return {at(0), at(1), at(2), at(3)}; }
  double* at(std::size_t row) { return rows_.data() + row * width_; }

  double sse = 0.0;       ///< of the candidate so far
  bool separable = true;  ///< whether every pivot so far was large enough

 private:
  std::vector<double> rows_;
  std::size_t width_;
};

class Elimination {
 public:
  explicit Elimination(const Objective& objective)
      : n_columns_(objective.grams().n_columns), width_(objective.width()) {}

  /// Goes to a fold with nothing eliminated.
  void begin(const ObjectiveFold& fold, OpenState& state);
  /// Eliminates the columns of a form from a state that has all pivots so far, or nothing when it is inseparable: then
  /// the state says so.
  void push(const OpenForm& form, OpenState& state);
  /// Forgets the pivots beyond the first n; states from before they were pushed are good again.
  void pop_to(std::size_t n) { n_ = n; }
  std::size_t n_pivots() const { return n_; }

  /// Held-out SSE of the state's candidate with a form of several columns brought in too; infinite when inseparable.
  double score_wide(const OpenForm& form, OpenState& state);

 private:
  void push_column(std::size_t column, OpenState& state);
  void copy_padded(const double* from, double* to) const;

  std::size_t n_columns_, width_;
  ObjectiveFold fold_{};
  std::size_t n_ = 0;
  std::vector<double> a_, v_;  ///< [n][width] reduced rows of the pivots
  std::vector<PivotScalars> pivots_;
  std::vector<double> l_, h_;
  SmallFold small_;
};

}  // namespace formsieve::search

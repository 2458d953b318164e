// The variables and the Hessian of the Newton system (newton_system.hpp) in lanes: eight predictors side by side, so
// that what is done for every predictor by itself, and for every pair of them, is done for eight at a time.
//
// A group takes predictors of about the same number of columns; the smaller ones are padded, and the entries of the
// padding are zero in every vector. Variables of a group, a line each: D̃ (upper triangle by rows), u, w. After the
// groups comes one line with λ and s.
#pragma once

#include "proof/dense_kernel.hpp"
#include "proof/reduced.hpp"

#include <array>
#include <cstddef>
#include <vector>

namespace formsieve::proof {

using Lines = std::vector<Line>;

/// Where λ and s stand in the last line.
inline constexpr std::size_t kLambdaLane = 0, kSLane = 1;

struct LaneGroup {
  std::size_t n_predictors = 0;
  std::array<std::size_t, kLineLanes> predictor{};  ///< index in Reduced::open
  std::size_t n_columns = 0;                        ///< q of its largest predictor
  std::size_t n_rows = 0;                           ///< of the Jacobian of the forms' barrier
  std::size_t first = 0;                            ///< line of its variables

  Lines jacobian;    ///< [row][variable]
  Lines by_lambda;   ///< [row]
  Lines basis;       ///< R [q][q], upper
  Line u_curvature;  ///< μ / u²; 0 where the predictor must be in; 1 in the padding
  Lines own;         ///< preconditioner: Cholesky factor of D̃ and u, lower triangle by rows
  Lines coupling;    ///< [D̃ and u][w and λ], L⁻¹ of what they have to do with each other
  Lines schur;       ///< of w and λ, lower triangle by rows

  std::size_t n_entries() const { return n_columns * (n_columns + 1) / 2; }
  std::size_t n_own() const { return n_entries() + 1; }
  std::size_t n_variables() const { return n_own() + n_columns; }
  std::size_t u_line() const { return first + n_entries(); }
  std::size_t w_line() const { return first + n_own(); }
};

/// Index of (i, k), i ≤ k, in an upper triangle by rows.
inline constexpr std::size_t upper_index(std::size_t i, std::size_t k, std::size_t order) {
  return i * order - i * (i + 1) / 2 + k;
}
/// Index of (i, k), i ≥ k, in a lower triangle by rows.
inline constexpr std::size_t lower_index(std::size_t i, std::size_t k) { return i * (i + 1) / 2 + k; }

/// Groups of equal n_columns one after the other.
struct LaneClass {
  std::size_t first_group = 0, n_groups = 0, n_columns = 0;
};

/// One predictor's place.
struct LanePlace {
  std::size_t group = 0, lane = 0;
  std::size_t first = 0, n_columns = 0;  ///< its columns in the reduced matrix
  std::size_t block_line = 0;            ///< of its blocks of A
};

/// All groups and A = (M − D)⁻¹ in the predictors' bases, block by block: those of predictor j lie together, group by
/// group, [own columns][the group's columns].
class Lanes {
 public:
  explicit Lanes(const Reduced& problem);

  std::size_t n_lines() const { return n_lines_; }
  std::size_t prices_line() const { return n_lines_ - 1; }
  std::vector<LaneGroup>& groups() { return groups_; }
  const std::vector<LaneGroup>& groups() const { return groups_; }
  const std::vector<LaneClass>& classes() const { return classes_; }
  const std::vector<LanePlace>& places() const { return places_; }
  Line* block(std::size_t predictor, std::size_t group) {
    return blocks_.data() + places_[predictor].block_line + places_[predictor].n_columns * columns_before_[group];
  }
  const Line* block(std::size_t predictor, std::size_t group) const {
    return blocks_.data() + places_[predictor].block_line + places_[predictor].n_columns * columns_before_[group];
  }

 private:
  void make_groups(const Reduced& problem);
  void place_blocks();

  std::vector<LaneGroup> groups_;
  std::vector<LaneClass> classes_;
  std::vector<LanePlace> places_;
  std::vector<std::size_t> columns_before_;
  Lines blocks_;
  std::size_t n_lines_ = 0;
};

}  // namespace formsieve::proof

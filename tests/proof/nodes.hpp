// Small nodes of the proof to try its parts on, and plain ways to compute what they claim.
#pragma once

#include "proof/dual.hpp"
#include "proof/reduced.hpp"

#include <cstdint>
#include <vector>

namespace formsieve::test {

struct PredictorShape {
  std::vector<Eigen::Index> forms;  ///< columns of each
  bool must = false;
};

/// A node of simulated predictors: the columns of a predictor are functions of one variable, nearly collinear as forms
/// are (`nearness` is the size of what is their own); columns and response of unit length. The first third of the
/// predictors act.
proof::Reduced make_node(std::uint64_t seed, Eigen::Index n_rows, const std::vector<PredictorShape>& shapes,
                         double nearness = 0.3, double noise = 0.5);

/// The range of all open columns with τ_k = level · exp(−price · k) at its ends.
proof::ColumnRange whole_range(const proof::Reduced& node, double level, double price);

/// D = η M between the forms of a predictor and ξ M within, ξ < η, such that M − D is positive definite; g = 0.
proof::DualPoint plain_start(const proof::Reduced& node, double lambda, double mu);

/// yy − (b − g)ᵀ(M − D)⁻¹(b − g) − Σ_j u_j − s with u and s as small as the constraints allow; −infinity where one of
/// D_ff and M − D is not positive definite.
double dual_value(const proof::Reduced& node, const proof::ColumnRange& range, const proof::DualPoint& point);

/// The smallest RSS − τ_k of all candidates with a number of columns in the range, τ_k between the ends on the straight
/// line through them (a convex τ lies below it, which makes the difference larger).
double smallest_excess(const proof::Reduced& node, const proof::ColumnRange& range);

}  // namespace formsieve::test

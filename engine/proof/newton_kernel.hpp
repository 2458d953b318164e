// What is done in lanes (newton_lanes.hpp), for the best instruction set of the processor. Nothing here allocates.
#pragma once

#include "proof/newton_lanes.hpp"

namespace formsieve::proof {

/// blocks(j, group) ← R_jᵀ blocks(j, group) R for all lanes of the group.
void change_basis(Lanes& lanes, std::size_t predictor, Line* work);

/// out += the part of (−Hessian) in that couples predictors: μ (A D̃ A) on D̃, 2 A w on w. `work`: kernel_work() lines.
void multiply_blocks(const Lanes& lanes, double mu, const Line* in, Line* out, Line* work);
std::size_t kernel_work(const Lanes& lanes);

/// out ← μJᵀ(J in + λ-part · λ) + the barrier of u; returns what it adds to λ's own.
double multiply_own(const LaneGroup& group, double mu, double lambda, const Line* in, Line* out);

/// The preconditioner's blocks of a group: own, coupling and schur. False where a pivot is not positive.
bool eliminate_own(LaneGroup& group, double mu);
/// out ← L⁻¹ in for D̃ and u; rest ← couplingᵀ out [w and λ].
void forward_own(const LaneGroup& group, const Line* in, Line* out, Line* rest);
/// out ← L⁻ᵀ(out − coupling · rest).
void backward_own(const LaneGroup& group, const Line* rest, Line* out);

double dot(const Lines& left, const Lines& right);
/// to ← to + factor · from.
void add_multiple(const Lines& from, double factor, Lines& to);

}  // namespace formsieve::proof

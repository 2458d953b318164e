// The scores of all candidates that differ from one in a single predictor.
#pragma once

#include "proof/problem.hpp"
#include "proof/scope.hpp"

#include <Eigen/Core>

#include <cstddef>
#include <cstdint>
#include <functional>
#include <span>
#include <vector>

namespace formsieve::proof {

/// With F the columns of the candidate, K = G_FF⁻¹, β = Kb_F and A_x = KG_Fx: a block X of other columns has the Gram
/// R = G_XX − G_XF A_X and the products c = b_X − G_XF β after F; with the columns J of F left out, R + A_JXᵀK_JJ⁻¹A_JX
/// and c + A_JXᵀK_JJ⁻¹β_J, and the RSS grows by β_JᵀK_JJ⁻¹β_J. So one factorisation scores all changes; the scores lose
/// digits where columns are nearly collinear and are not what is listed.
class SingleChanges {
 public:
  SingleChanges(const RootGram& root, const Scope& scope) : root_(&root), scope_(&scope) {}

  using Visit = std::function<void(std::size_t predictor, std::uint16_t choice, double score)>;
  /// Calls visit for every change within the scope that is not nearly collinear. False, and no call, when the
  /// candidate itself is. Cost O(k² columns).
  bool operator()(const search::Choice& from, const Visit& visit);

 private:
  bool prepare(const search::Choice& from);
  void visit_predictor(const search::Choice& from, std::size_t predictor, std::size_t terms, const Visit& visit);
  double left_out_rss(std::size_t predictor) const;
  double changed_rss(std::size_t predictor, const search::FormBlock& form, double without) const;

  const RootGram* root_;
  const Scope* scope_;
  std::vector<Eigen::Index> columns_;
  std::vector<Eigen::Index> first_, width_;  ///< [n_predictors] where its columns stand in F
  Eigen::MatrixXd cross_;                    ///< [n_columns × k] G_xF
  Eigen::MatrixXd inverse_;                  ///< K
  Eigen::MatrixXd coefficients_;             ///< [n_columns × k] A_xᵀ
  Eigen::VectorXd beta_, left_, variance_;   ///< β; c and diagonal of R for every column
  double rss_ = 1.0;
  std::size_t response_ = 0;
};

}  // namespace formsieve::proof

// The record of a listed candidate from which new rows can be scored.
#include "pipeline/examine.hpp"

#include "backtransform/backtransform.hpp"
#include "backtransform/corrections.hpp"
#include "backtransform/slices.hpp"
#include "model/held_out.hpp"

#include <Eigen/QR>

#include <algorithm>
#include <cmath>

namespace formsieve::pipeline {

namespace {

using Eigen::Index;

std::vector<double> list_of(const Eigen::VectorXd& values) { return {values.begin(), values.end()}; }

/// R upper triangular with RᵀR = A·Aᵀ.
Eigen::MatrixXd triangle_of(const Eigen::MatrixXd& inverse_root) {
  // Column by column, not in blocks whose size may follow the machine's caches.
  Eigen::MatrixXd triangle = inverse_root.transpose();
  Eigen::VectorXd scales(triangle.cols());
  Eigen::internal::householder_qr_inplace_unblocked(triangle, scales);
  return triangle.triangularView<Eigen::Upper>();
}

std::vector<double> packed(const Eigen::MatrixXd& triangle) {
  std::vector<double> values;
  for (Index i = 0; i < triangle.rows(); ++i)
    for (Index j = i; j < triangle.cols(); ++j) values.push_back(triangle(i, j));
  return values;
}

/// Largest ‖R x‖² over the rows.
double largest_leverage(const Eigen::MatrixXd& x, const Eigen::MatrixXd& triangle) {
  double largest = 0.0;
  for (Index i = 0; i < x.rows(); ++i)
    largest = std::max(largest, triangle.lazyProduct(x.row(i).transpose()).squaredNorm());
  return largest;
}

model::MeanPart mean_part(const forms::Form& response, const Eigen::VectorXd& residuals,
                          const Eigen::VectorXd& weights) {
  const backtransform::Smearing smearing(response, residuals, weights);
  model::MeanPart part;
  part.smallest = smearing.smallest_residual();
  part.first = smearing.moments().first;
  part.second = smearing.moments().second;
  part.third = smearing.moments().third;
  part.mean_exp = smearing.mean_exp();
  part.mean_cosh = smearing.mean_cosh();
  part.mean_sinh = smearing.mean_sinh();
  part.residuals = list_of(weights.size() > 0 ? residuals.cwiseProduct(weights.cwiseSqrt()) : residuals);
  if (part.residuals.size() > backtransform::kMostResiduals) {
    std::sort(part.residuals.begin(), part.residuals.end());
    part.residuals = backtransform::slice_means(part.residuals, backtransform::kMostResiduals);
  }
  return part;
}

/// A row at a cut must stay in its third in whatever order its prediction is summed up.
constexpr double kCutRounding = 1e-11;

/// The rule that the candidate uses: smearing, or smearing within thirds.
model::MeanRule mean_rule(const judge::Candidate& candidate, const Eigen::VectorXd& fitted, const Eigen::VectorXd& z,
                          const Eigen::VectorXd& weights, const std::vector<double>& measured) {
  const Eigen::VectorXd residuals = z - fitted;
  model::MeanRule rule;
  rule.method = candidate.back.used;
  if (rule.method != backtransform::method_name(backtransform::Method::thirds)) {
    rule.parts = {mean_part(candidate.response, residuals, weights)};
    return rule;
  }
  const Eigen::Map<const Eigen::VectorXd> own(measured.data(), fitted.size());
  const auto df = static_cast<double>(candidate.n) - static_cast<double>(candidate.coefficients.size());
  const backtransform::ThirdsSmearing thirds(
      {candidate.response, fitted, residuals, weights, own, candidate.sigma, df});
  for (const double cut : thirds.cuts()) rule.cuts.push_back(cut + kCutRounding * std::max(1.0, std::abs(cut)));
  for (std::size_t third = 0; third < 3; ++third) {
    std::vector<Index> rows;
    for (Index i = 0; i < fitted.size(); ++i)
      if (thirds.third_of(fitted[i]) == third) rows.push_back(i);
    const bool has_own = static_cast<Index>(rows.size()) >= backtransform::kSmallestThird;
    const Eigen::VectorXd of_third = has_own ? residuals(rows).eval() : residuals;
    const Eigen::VectorXd weights_of = has_own && weights.size() > 0 ? weights(rows).eval() : weights;
    rule.parts.push_back(mean_part(candidate.response, of_third, weights_of));
  }
  return rule;
}

std::vector<model::Term> terms_of(const judge::Candidate& candidate) {
  std::vector<model::Term> terms;
  for (std::size_t i = 0; i < candidate.terms.size(); ++i) {
    const judge::ValidRange& range = candidate.ranges[i];
    const bool is_levels = candidate.terms[i].form.kind == forms::Kind::levels;
    terms.push_back({candidate.terms[i].column, candidate.terms[i].form, range.seen_min, range.seen_max,
                     is_levels ? forms::domain(candidate.terms[i].form) : range.defined});
  }
  return terms;
}

}  // namespace

/// Fits without each fold of the first repeat, and how far they were off on its rows.
Status Examiner::keep_folds(const Eigen::MatrixXd& x, const Eigen::VectorXd& z, const fit::FoldedFit& folded,
                            model::Model& model) const {
  const auto& fold_of = prepared_.folds.fold_of.front();
  for (std::size_t fold = 0; fold < prepared_.folds.count; ++fold) {
    const auto solution = folded.without(fold);
    if (!solution) return solution.error();
    const Eigen::VectorXd predicted = x * solution->coefficients;
    std::vector<double> off;
    for (std::size_t i = 0; i < fold_of.size(); ++i) {
      if (fold_of[i] != fold) continue;
      const auto row = static_cast<Index>(i);
      off.push_back(std::abs(z[row] - predicted[row]) * (weights_.size() > 0 ? std::sqrt(weights_[row]) : 1.0));
    }
    std::sort(off.begin(), off.end());
    model.folds.push_back(model::fold_record(list_of(solution->coefficients), std::move(off)));
  }
  return {};
}

Result<model::Model> Examiner::model(const search::Choice& choice, const judge::Candidate& candidate) const {
  const Eigen::MatrixXd x = design_of(choice);
  const Eigen::VectorXd& z = response_[choice.response];
  const fit::FoldedFit folded(x, z, weights_, prepared_.folds.fold_of.front(), prepared_.folds.count);
  const auto inverse_root = folded.inverse_root_of_all();
  if (!inverse_root) return inverse_root.error();
  const Eigen::MatrixXd triangle = triangle_of(*inverse_root);

  model::Model model;
  model.rank = candidate.rank;
  model.number = candidate.number;
  model.marks = candidate.marks;
  model.equation = candidate.equation;
  model.response = candidate.response;
  model.terms = terms_of(candidate);
  for (const auto& coefficient : candidate.coefficients) model.coefficients.push_back(coefficient.value);
  model.root = packed(triangle);
  model.sigma = candidate.sigma;
  model.n = candidate.n;
  model.largest_leverage = largest_leverage(x, triangle);
  const Eigen::Map<const Eigen::VectorXd> beta(model.coefficients.data(), x.cols());
  model.mean = mean_rule(candidate, x * beta, z, weights_, prepared_.data.response);
  if (auto status = keep_folds(x, z, folded, model); !status) return status.error();
  return model;
}

}  // namespace formsieve::pipeline

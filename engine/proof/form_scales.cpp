#include "proof/form_scales.hpp"

#include <Eigen/Cholesky>

#include <algorithm>
#include <cmath>

namespace formsieve::proof {

namespace {

constexpr double kSmallestDiagonal = 1e-12;

}  // namespace

FormScales::FormScales(const Reduced& problem, const Eigen::MatrixXd& d) : problem_(&problem) {
  single_ = d.diagonal().cwiseMax(kSmallestDiagonal).cwiseSqrt();
  for (const OpenPredictor& predictor : problem.open) {
    std::vector<Eigen::MatrixXd> factors(predictor.forms.size());
    for (std::size_t f = 0; f < predictor.forms.size(); ++f) {
      const OpenForm& form = predictor.forms[f];
      if (form.n_columns == 1) continue;
      const Eigen::LLT<Eigen::MatrixXd> factor(d.block(form.first, form.first, form.n_columns, form.n_columns));
      factors[f] = factor.info() == Eigen::Success
                       ? Eigen::MatrixXd(factor.matrixL())
                       : Eigen::MatrixXd(std::sqrt(kSmallestDiagonal) *
                                         Eigen::MatrixXd::Identity(form.n_columns, form.n_columns));
    }
    lower_.push_back(std::move(factors));
  }
}

double FormScales::length(std::size_t predictor, std::size_t form, const Eigen::VectorXd& v) const {
  const OpenForm& open = problem_->open[predictor].forms[form];
  if (open.n_columns == 1) return single_(open.first) * std::abs(v(open.first));
  return (lower_[predictor][form].transpose() * v.segment(open.first, open.n_columns)).norm();
}

double FormScales::total_length(std::size_t predictor, const Eigen::VectorXd& v) const {
  double total = 0.0;
  for (std::size_t f = 0; f < problem_->open[predictor].forms.size(); ++f) total += length(predictor, f, v);
  return total;
}

}  // namespace formsieve::proof

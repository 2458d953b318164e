#include "backtransform/backtransform.hpp"

#include "base/sums.hpp"

#include <cassert>
#include <cmath>
#include <utility>

namespace formsieve::backtransform {

Correction judged(std::string method, double factor, std::span<const double> predicted,
                  std::span<const double> measured) {
  assert(!measured.empty() && predicted.size() % measured.size() == 0);
  Correction correction;
  correction.method = std::move(method);
  correction.factor = factor;
  std::vector<double> error(predicted.size());
  for (std::size_t i = 0; i < predicted.size(); ++i) {
    error[i] = predicted[i] - measured[i % measured.size()];
    if (std::isnan(error[i])) return correction;
  }
  correction.cv_bias = base::mean(error);
  correction.cv_rmse = std::sqrt(base::sum_of_squares(error, 0.0) / static_cast<double>(error.size()));
  return correction;
}

double mean_ratio(const Smearing& smearing, const Eigen::Ref<const Eigen::VectorXd>& eta,
                  const Eigen::Ref<const Eigen::VectorXd>& weights) {
  std::vector<double> smeared, naive;
  for (Eigen::Index i = 0; i < eta.size(); ++i) {
    smeared.push_back(smearing.mean(eta(i), weights.size() == 0 ? 1.0 : weights(i)));
    naive.push_back(smearing.naive(eta(i)));
  }
  return base::sum(smeared) / base::sum(naive);
}

Summary summarise(const Smearing& smearing, const Eigen::Ref<const Eigen::VectorXd>& eta,
                  const Eigen::Ref<const Eigen::VectorXd>& weights, const std::string& response_column,
                  const std::string& right_hand_side) {
  Summary summary;
  const auto constant = smearing.constant_factor();
  summary.smearing_factor = constant ? *constant : mean_ratio(smearing, eta, weights);
  summary.formula = formula(smearing, response_column, right_hand_side);
  summary.corrections.resize(2);
  summary.corrections[0].method = "none";
  summary.corrections[1].method = "smearing";
  summary.corrections[1].factor = summary.smearing_factor;
  return summary;
}

}  // namespace formsieve::backtransform

#include "backtransform/corrections.hpp"

#include <algorithm>
#include <vector>

namespace formsieve::backtransform {

namespace {

using Eigen::Index;

/// The ⌈m/3⌉-th and ⌈2m/3⌉-th smallest fitted value.
std::array<double, 2> cuts_of(const Eigen::Ref<const Eigen::VectorXd>& fitted) {
  std::vector<double> values(fitted.begin(), fitted.end());
  const std::size_t m = values.size();
  std::array<double, 2> cuts{};
  for (const std::size_t k : {std::size_t{1}, std::size_t{2}}) {
    const auto at = values.begin() + static_cast<std::ptrdiff_t>((k * m + 2) / 3 - 1);
    std::nth_element(values.begin(), at, values.end());
    cuts[k - 1] = *at;
  }
  return cuts;
}

}  // namespace

ThirdsSmearing::ThirdsSmearing(const TrainingFit& fit) : cuts_(cuts_of(fit.fitted)) {
  std::array<std::vector<Index>, 3> rows;
  for (Index i = 0; i < fit.fitted.size(); ++i) rows[third_of(fit.fitted[i])].push_back(i);
  for (const auto& of_third : rows) {
    if (static_cast<Index>(of_third.size()) < kSmallestThird) {
      complete_ = false;
      thirds_.emplace_back(fit.response, fit.residuals, fit.weights);
      continue;
    }
    const Eigen::VectorXd residuals = fit.residuals(of_third);
    const Eigen::VectorXd weights = fit.weights.size() == 0 ? Eigen::VectorXd() : fit.weights(of_third).eval();
    thirds_.emplace_back(fit.response, residuals, weights);
  }
}

std::size_t ThirdsSmearing::third_of(double eta) const {
  if (eta <= cuts_[0]) return 0;
  return eta <= cuts_[1] ? 1 : 2;
}

double ThirdsSmearing::mean(const NewRow& row) const { return thirds_[third_of(row.eta)].mean(row.eta, row.weight); }

/// Within the third of the row, since the mean jumps between thirds.
double ThirdsSmearing::slope(const NewRow& row) const {
  const Smearing& third = thirds_[third_of(row.eta)];
  return slope_of([&](double eta) { return third.mean(eta, row.weight); }, row.eta);
}

}  // namespace formsieve::backtransform

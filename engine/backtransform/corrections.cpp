#include "backtransform/corrections.hpp"

#include "backtransform/g_function.hpp"
#include "backtransform/normal_theory.hpp"
#include "base/sums.hpp"

#include <cmath>
#include <limits>
#include <numbers>
#include <utility>

namespace formsieve::backtransform {

namespace {

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

double finite_or_nan(double value) { return std::isfinite(value) ? value : kNaN; }

/// h(η).
class Uncorrected final : public MeanCorrection {
 public:
  explicit Uncorrected(const TrainingFit& fit) : response_(fit.response) {}
  double mean(const NewRow& row) const override { return finite_or_nan(forms::inverse(response_, row.eta)); }

 private:
  forms::Form response_;
};

class Smeared final : public MeanCorrection {
 public:
  explicit Smeared(const TrainingFit& fit) : smearing_(fit.response, fit.residuals, fit.weights) {}
  double mean(const NewRow& row) const override { return smearing_.mean(row.eta, row.weight); }

 private:
  Smearing smearing_;
};

class NormalTheory final : public MeanCorrection {
 public:
  explicit NormalTheory(const TrainingFit& fit) : mean_(fit.response, fit.df > 0.0 ? fit.sigma : kNaN) {}
  double mean(const NewRow& row) const override { return mean_(row.eta, row.weight); }

 private:
  NormalMean mean_;
};

/// exp(η̂)·g (Bradu & Mundlak 1970); for log10 the same with η̂ and s in units of ln.
class Unbiased final : public MeanCorrection {
 public:
  explicit Unbiased(const TrainingFit& fit)
      : back_(fit.response),
        to_ln_(plain_kind(fit.response) == forms::Kind::log10 ? std::numbers::ln10 : 1.0),
        sigma_(fit.sigma * to_ln_),
        df_(fit.df) {}
  double mean(const NewRow& row) const override {
    return finite_or_nan(back_(std::exp(to_ln_ * row.eta) * unbiased_factor(df_, sigma_, row.leverage, row.weight)));
  }

 private:
  WayBack back_;
  double to_ln_, sigma_, df_;
};

/// The uncorrected prediction times the mean measured over the mean uncorrected of the training rows (Snowdon 1991).
/// Undefined where that is no positive number.
class RatioOfMeans final : public MeanCorrection {
 public:
  explicit RatioOfMeans(const TrainingFit& fit) : uncorrected_(fit) {
    std::vector<double> naive(static_cast<std::size_t>(fit.fitted.size()));
    for (std::size_t i = 0; i < naive.size(); ++i)
      naive[i] = uncorrected_.mean({fit.fitted[static_cast<Eigen::Index>(i)]});
    const std::vector<double> measured(fit.measured_own.begin(), fit.measured_own.end());
    ratio_ = base::mean(measured) / base::mean(naive);
    if (!(ratio_ > 0.0)) ratio_ = kNaN;
  }
  double mean(const NewRow& row) const override { return finite_or_nan(ratio_ * uncorrected_.mean(row)); }

 private:
  Uncorrected uncorrected_;
  double ratio_ = kNaN;
};

}  // namespace

double MeanCorrection::slope(const NewRow& row) const {
  NewRow moved = row;
  return slope_of(
      [&](double eta) {
        moved.eta = eta;
        return mean(moved);
      },
      row.eta);
}

std::string method_name(Method method) {
  switch (method) {
    case Method::none:
      return "none";
    case Method::smearing:
      return "smearing";
    case Method::normal_theory:
      return "normal theory";
    case Method::unbiased:
      return "unbiased (g-function)";
    case Method::thirds:
      return "smearing by thirds";
    case Method::ratio_of_means:
      return "ratio of means";
  }
  return {};
}

std::vector<Method> methods_for(const forms::Form& response) {
  if (plain_kind(response) == forms::Kind::identity) return {Method::none, Method::smearing};
  if (is_logarithm(response))
    return {Method::none,     Method::smearing, Method::normal_theory,
            Method::unbiased, Method::thirds,   Method::ratio_of_means};
  return {Method::none, Method::smearing, Method::normal_theory, Method::thirds, Method::ratio_of_means};
}

std::unique_ptr<const MeanCorrection> make_correction(Method method, const TrainingFit& fit) {
  switch (method) {
    case Method::none:
      return std::make_unique<Uncorrected>(fit);
    case Method::smearing:
      return std::make_unique<Smeared>(fit);
    case Method::normal_theory:
      return std::make_unique<NormalTheory>(fit);
    case Method::unbiased:
      return std::make_unique<Unbiased>(fit);
    case Method::thirds:
      return std::make_unique<ThirdsSmearing>(fit);
    case Method::ratio_of_means:
      return std::make_unique<RatioOfMeans>(fit);
  }
  return nullptr;
}

}  // namespace formsieve::backtransform

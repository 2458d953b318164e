#include "base/sums.hpp"

#include <cmath>
#include <limits>

namespace formsieve::base {

namespace {

/// Neumaier's improvement of Kahan's compensated sum.
class Compensated {
 public:
  void add(double x) {
    const double t = sum_ + x;
    correction_ += std::abs(sum_) >= std::abs(x) ? (sum_ - t) + x : (x - t) + sum_;
    sum_ = t;
  }
  double value() const { return sum_ + correction_; }

 private:
  double sum_ = 0.0;
  double correction_ = 0.0;
};

}  // namespace

double sum(std::span<const double> x) {
  Compensated total;
  for (const double value : x) total.add(value);
  return total.value();
}

double mean(std::span<const double> x) {
  if (x.empty()) return std::numeric_limits<double>::quiet_NaN();
  return sum(x) / static_cast<double>(x.size());
}

double weighted_mean(std::span<const double> x, std::span<const double> weights) {
  if (weights.empty()) return mean(x);
  Compensated numerator;
  Compensated denominator;
  for (std::size_t i = 0; i < x.size(); ++i) {
    numerator.add(weights[i] * x[i]);
    denominator.add(weights[i]);
  }
  return numerator.value() / denominator.value();
}

double sum_of_squares(std::span<const double> x, double centre) {
  Compensated total;
  for (const double value : x) total.add((value - centre) * (value - centre));
  return total.value();
}

}  // namespace formsieve::base

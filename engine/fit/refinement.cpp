#include "fit/refinement.hpp"

#include <cmath>
#include <limits>

namespace formsieve::fit {

namespace {

/// A correction this small beside the solution is rounding of the solution itself.
constexpr long double kConverged = 8.0L * std::numeric_limits<long double>::epsilon();

/// The augmented system's unknowns and residuals, in long double.
class AugmentedSystem {
 public:
  AugmentedSystem(const Eigen::Ref<const Eigen::MatrixXd>& x, const Eigen::Ref<const Eigen::VectorXd>& y,
                  const Eigen::Ref<const Eigen::VectorXd>& weights, const Vector<long double>& centre,
                  const Vector<long double>& scale)
      : x_(x),
        response_(y.cast<long double>()),
        root_weights_(weights.cast<long double>().cwiseSqrt()),
        centre_(centre),
        scale_(scale),
        intercept_norm_(root_weights_.size() == 0 ? std::sqrt(static_cast<long double>(x.rows()))
                                                  : root_weights_.norm()),
        gamma_(Vector<long double>::Zero(x.cols())),
        s_(Vector<long double>::Zero(x.rows())) {}

  /// The system's residuals before any correction.
  void start(Vector<long double>& f, Vector<long double>& g) const {
    f = response_;
    whiten(f);
    g = gamma_;
  }

  /// f = √w·(y − fitted) − s and g = −Aᵀs.
  void residuals(Vector<long double>& f, Vector<long double>& g) const {
    f = raw_residuals();
    whiten(f);
    f -= s_;
    Vector<long double> ws = s_;
    whiten(ws);
    g.resize(gamma_.size());
    g(0) = -ws.sum();
    for (Eigen::Index j = 0; j < scale_.size(); ++j) {
      long double total = 0.0L;
      for (Eigen::Index i = 0; i < ws.size(); ++i) {
        total += (static_cast<long double>(x_(i, j + 1)) - centre_(j)) * ws(i);
      }
      g(j + 1) = -total / scale_(j);
    }
  }

  Vector<long double> raw_residuals() const {
    Vector<long double> r = response_.array() - gamma_(0);
    for (Eigen::Index j = 0; j < scale_.size(); ++j) {
      const long double slope = gamma_(j + 1) / scale_(j);
      for (Eigen::Index i = 0; i < r.size(); ++i) {
        r(i) -= slope * (static_cast<long double>(x_(i, j + 1)) - centre_(j));
      }
    }
    return r;
  }

  void correct(const Vector<long double>& s, const Vector<long double>& gamma) {
    s_ += s;
    gamma_ += gamma;
  }
  /// Length of a vector of coefficients in the whitened response's units.
  long double length(const Vector<long double>& gamma) const {
    return std::hypot(gamma(0) * intercept_norm_, gamma.tail(scale_.size()).stableNorm());
  }
  long double length() const { return length(gamma_); }

  Vector<long double> coefficients() const {
    Vector<long double> b = gamma_;
    for (Eigen::Index j = 0; j < scale_.size(); ++j) {
      b(j + 1) /= scale_(j);
      b(0) -= b(j + 1) * centre_(j);
    }
    return b;
  }

 private:
  void whiten(Vector<long double>& v) const {
    if (root_weights_.size() != 0) v.array() *= root_weights_.array();
  }

  const Eigen::Ref<const Eigen::MatrixXd>& x_;
  Vector<long double> response_, root_weights_;
  const Vector<long double>& centre_;
  const Vector<long double>& scale_;
  long double intercept_norm_;
  Vector<long double> gamma_, s_;
};

}  // namespace

template <class Scalar>
RefinedSolution refined_solution(const CentredFactor<Scalar>& factor, const Eigen::Ref<const Eigen::MatrixXd>& x,
                                 const Eigen::Ref<const Eigen::VectorXd>& y,
                                 const Eigen::Ref<const Eigen::VectorXd>& weights) {
  AugmentedSystem system(x, y, weights, factor.centre(), factor.scale());
  Vector<long double> f, g;
  Vector<Scalar> s, gamma;
  system.start(f, g);
  long double previous = std::numeric_limits<long double>::infinity();
  for (int pass = 0; pass < kMostPasses; ++pass) {
    if (pass > 0) system.residuals(f, g);
    factor.solve_augmented(f.template cast<Scalar>(), g.template cast<Scalar>(), s, gamma);
    const long double correction = system.length(gamma.template cast<long double>());
    if (!(correction < previous / 2.0L)) break;  // no longer shrinking: rounding, left out
    system.correct(s.template cast<long double>(), gamma.template cast<long double>());
    const long double expected_next = correction * (correction / previous);  // 0 after the first pass: not yet known
    if (pass > 0 && expected_next <= kConverged * system.length()) break;
    previous = correction;
  }
  return {system.coefficients(), system.raw_residuals()};
}

template RefinedSolution refined_solution(const CentredFactor<double>&, const Eigen::Ref<const Eigen::MatrixXd>&,
                                          const Eigen::Ref<const Eigen::VectorXd>&,
                                          const Eigen::Ref<const Eigen::VectorXd>&);
template RefinedSolution refined_solution(const CentredFactor<long double>&, const Eigen::Ref<const Eigen::MatrixXd>&,
                                          const Eigen::Ref<const Eigen::VectorXd>&,
                                          const Eigen::Ref<const Eigen::VectorXd>&);

}  // namespace formsieve::fit

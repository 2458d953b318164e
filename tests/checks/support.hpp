// Fits for the tests of the checks, by long double QR here rather than by the room fit.
#pragma once

#include "checks/checks.hpp"

#include <Eigen/Core>

#include <string>
#include <vector>

namespace formsieve::checks {

/// A least-squares fit that owns what a Subject refers to. Terms of one column each, named x1, x2, …
struct Fitted {
  Eigen::MatrixXd x;
  Eigen::VectorXd y, coefficients, fitted, residuals, leverage, weights;
  double sigma = 0.0;
  std::vector<std::size_t> term_first;
  std::vector<std::string> term_names;

  Subject subject() const {
    return {x, fitted, residuals, leverage, weights, sigma, term_first, term_names, false, {}};
  }
  /// The same with the rows in the order given.
  Subject ordered(std::vector<std::size_t> order) const {
    return {x, fitted, residuals, leverage, weights, sigma, term_first, term_names, true, std::move(order)};
  }
};

/// x holds the intercept in its first column; `weights` of size 0 for none.
Fitted fit_by_long_double(const Eigen::MatrixXd& x, const Eigen::VectorXd& y,
                          const Eigen::VectorXd& weights = Eigen::VectorXd(0));

/// The same from one column x.
Fitted line_through(const std::vector<double>& x, const std::vector<double>& y);

/// 0, 1, …, n − 1.
std::vector<std::size_t> row_order(Eigen::Index n);

Eigen::VectorXd vector_of(const std::vector<double>& values);

/// Seeded standard normal numbers: Box–Muller on a 64-bit congruential generator, the same everywhere.
class Normals {
 public:
  explicit Normals(unsigned long long seed) : state_(seed) {}
  double next();
  Eigen::VectorXd vector(Eigen::Index n);
  Eigen::MatrixXd design(Eigen::Index n, Eigen::Index p);  ///< intercept first

 private:
  double uniform();
  unsigned long long state_;
};

const Check& check_named(const std::vector<Check>& checks, const std::string& name);

}  // namespace formsieve::checks

#include "backtransform/gauss_hermite.hpp"

#include <Eigen/Eigenvalues>

#include <cmath>

namespace formsieve::backtransform {

namespace {

/// Values at z of the Hermite polynomials of degree kNodes − 1 and kNodes, orthonormal under the normal density:
/// √(k + 1)·p_{k+1} = z·p_k − √k·p_{k−1}.
struct Highest {
  long double before, last;
};
Highest highest_polynomials(long double z) {
  Highest p{0.0L, 1.0L};
  for (int k = 0; k < kNodes; ++k) {
    const auto order = static_cast<long double>(k);
    p = {p.last, (z * p.last - std::sqrt(order) * p.before) / std::sqrt(order + 1.0L)};
  }
  return p;
}

/// The nodes are the zeros of the highest polynomial, which the eigenvalues of the tridiagonal matrix of the recurrence
/// come near (Golub & Welsch 1969) and two steps of Newton reach, since p_N′ = √N·p_{N−1}; the weights are
/// 1/(N·p_{N−1}²), which keeps the digits of the smallest.
NormalRule computed_rule() {
  Eigen::VectorXd beside(kNodes - 1);
  for (int k = 1; k < kNodes; ++k) beside[k - 1] = std::sqrt(static_cast<double>(k));
  Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd> solver;
  solver.computeFromTridiagonal(Eigen::VectorXd::Zero(kNodes), beside, Eigen::EigenvaluesOnly);
  NormalRule rule{Eigen::ArrayXd(kNodes), Eigen::ArrayXd(kNodes)};
  const long double n = kNodes;
  for (int k = 0; k < kNodes; ++k) {
    long double z = solver.eigenvalues()[k];
    for (int step = 0; step < 2; ++step) {
      const auto [before, last] = highest_polynomials(z);
      z -= last / (std::sqrt(n) * before);
    }
    const long double before = highest_polynomials(z).before;
    rule.nodes[k] = static_cast<double>(z);
    rule.weights[k] = static_cast<double>(1.0L / (n * before * before));
  }
  return rule;
}

}  // namespace

const NormalRule& normal_rule() {
  static const NormalRule rule = computed_rule();
  return rule;
}

}  // namespace formsieve::backtransform

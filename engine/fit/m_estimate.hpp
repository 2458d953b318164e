// Private to room fit: M estimates of a regression in orthonormal coordinates, scale held or by the median.
//
// The model is r = e − U δ with U [n × p], U'U = n·I, and e the residuals of least squares, so that δ = 0 is least
// squares and no digits are lost to large fitted values.
#pragma once

#include <Eigen/Core>

#include <optional>
#include <span>

namespace formsieve::fit {

/// Bisquare of Beaton & Tukey 1974, ρ scaled to 1 at most: ρ(u) = 1 − (1 − (u/c)²)³ within c.
struct Bisquare {
  double c;
  double rho(double u) const;
  double weight(double u) const;      ///< ψ(u)/u over its value at 0
  double derivative(double u) const;  ///< ψ′(u) over its value at 0
};

/// Tuning constants: breakdown ½ and 95 % efficiency with normal errors (Yohai 1987).
inline constexpr Bisquare kHalfBreakdown{1.54764};
inline constexpr Bisquare kEfficient{4.685};
/// 95 % efficiency of Huber's ψ.
inline constexpr double kHuber = 1.345;
/// Median of |z| for a standard normal z.
inline constexpr double kNormalMedian = 0.674489750196082;

/// Rows of U and e that an estimate reads: views.
struct Rows {
  const Eigen::Ref<const Eigen::MatrixXd>& u;
  const Eigen::Ref<const Eigen::VectorXd>& e;
  Eigen::Index n() const { return u.rows(); }
  Eigen::Index p() const { return u.cols(); }
};

/// U'DU for a diagonal D, in chunks of rows of a fixed size. Cost O(n p²).
Eigen::MatrixXd weighted_gram(const Eigen::Ref<const Eigen::MatrixXd>& u, const Eigen::Ref<const Eigen::VectorXd>& d);

/// δ of the least squares with row weights `w`; unset when they leave too few rows.
std::optional<Eigen::VectorXd> reweighted(const Rows& rows, const Eigen::VectorXd& w);

/// median |r| / 0.6745.
double median_scale(const Eigen::Ref<const Eigen::VectorXd>& r);

/// The M-scale s: Σ ρ(r/s) = (n − p)/2 with kHalfBreakdown, the smallest residual scale at which half of the rows
/// agree. `start` > 0. 0 when more than about half of the residuals are 0. Cost O(n) a step, linear convergence.
double m_scale(const Eigen::Ref<const Eigen::VectorXd>& r, Eigen::Index p, double start);

/// Minimum of Σ ρ((e − Uδ)/scale) with kEfficient near `start`: Newton steps where they lower the sum, reweighted least
/// squares otherwise, until nothing moves by 1e-10 of the scale. Unset without convergence.
std::optional<Eigen::VectorXd> bisquare_estimate(const Rows& rows, double scale, Eigen::VectorXd start);

/// Huber's M estimate with the scale by the median absolute residual at every step. Unset without convergence or when
/// the scale is 0.
struct HuberEstimate {
  Eigen::VectorXd delta;
  double scale;
};
std::optional<HuberEstimate> huber_estimate(const Rows& rows);
double huber_weight(double u);

}  // namespace formsieve::fit

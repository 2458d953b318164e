#include "proof/coordinate_descent.hpp"

#include "proof/form_scales.hpp"

#include <algorithm>
#include <cmath>

namespace formsieve::proof {

namespace {

/// A sweep whose largest change is worth less than this share of λ is the last.
constexpr double kSmallChange_rel = 1e-4;
/// So many sweeps apart the value is looked at; a gain below this share of λ ends it.
constexpr std::size_t kSweepsBetweenLooks = 8;
constexpr double kSmallGain_rel = 0.02;
constexpr double kSmallestCurvature = 1e-13;

/// x ≥ 0 that minimises curvature·x² − 2·pull·x + ψ(others + scale·x), ψ as in FormScales with root = √(cλ), or s²
/// where the predictor must be in.
double shrink(double pull, double scale, double curvature, double others, double root, bool must) {
  const double square = std::max(0.0, (pull - scale * others) / (curvature + scale * scale));
  if (must || others >= root) return square;
  const double x = (pull - root * scale) / curvature;
  if (x <= 0.0) return 0.0;
  return others + scale * x > root ? square : x;
}

class Descent {
 public:
  Descent(const Reduced& problem, const Eigen::MatrixXd& z, const Eigen::MatrixXd& d, double lambda, Eigen::VectorXd& v)
      : problem_(problem), z_(z), scales_(problem, d), lambda_(lambda), v_(v), zv_(z * v) {}

  /// The largest change, in units of the objective.
  double sweep() {
    double largest = 0.0;
    for (std::size_t j = 0; j < problem_.open.size(); ++j) {
      double total = scales_.total_length(j, v_);
      for (std::size_t f = 0; f < problem_.open[j].forms.size(); ++f) {
        const bool single = problem_.open[j].forms[f].n_columns == 1;
        largest = std::max(largest, single ? move_single(j, f, total) : move_wide(j, f, total));
      }
    }
    return largest;
  }

  /// The Lagrangian bound on RSS_rel at this v.
  double value() const {
    double value = problem_.yy - v_.dot(zv_);
    for (std::size_t j = 0; j < problem_.open.size(); ++j) {
      double most = problem_.open[j].must ? -problem_.yy : 0.0;
      for (std::size_t f = 0; f < problem_.open[j].forms.size(); ++f) most = std::max(most, net_gain(j, f));
      value -= most;
    }
    return value;
  }

 private:
  double net_gain(std::size_t j, std::size_t f) const {
    const OpenForm& form = problem_.open[j].forms[f];
    const Eigen::VectorXd g = problem_.b.segment(form.first, form.n_columns) - zv_.segment(form.first, form.n_columns);
    const double price = problem_.open[j].must ? 0.0 : lambda_ * static_cast<double>(form.n_columns);
    if (form.n_columns == 1) return std::pow(g(0) / scales_.single(form.first), 2) - price;
    return scales_.lower(j, f).triangularView<Eigen::Lower>().solve(g).squaredNorm() - price;
  }

  double move_single(std::size_t j, std::size_t f, double& total) {
    const Eigen::Index i = problem_.open[j].forms[f].first;
    const double scale = scales_.single(i);
    const double curvature = std::max(z_(i, i), kSmallestCurvature);
    const double others = std::max(0.0, total - scale * std::abs(v_(i)));
    const double pull = problem_.b(i) - (zv_(i) - z_(i, i) * v_(i));
    const double x = shrink(std::abs(pull), scale, curvature, others, std::sqrt(lambda_), problem_.open[j].must);
    const double moved = (pull < 0.0 ? -x : x) - v_(i);
    total = others + scale * x;
    if (moved == 0.0) return 0.0;
    zv_.noalias() += moved * z_.col(i);
    v_(i) += moved;
    return moved * moved * (curvature + scale * scale);
  }

  /// One proximal step in u = Lᵀv_f, where the term is ψ(|u|): with A = L⁻¹Z_ffL⁻ᵀ and a ≥ its largest eigenvalue,
  /// uᵀAu − 2rᵀu is at most a|u|² − 2cᵀu + constant, c = au₀ − Au₀ + r, equal at u₀.
  double move_wide(std::size_t j, std::size_t f, double& total) {
    const OpenForm& form = problem_.open[j].forms[f];
    const auto lower = scales_.lower(j, f).triangularView<Eigen::Lower>();
    const auto z_block = z_.block(form.first, form.first, form.n_columns, form.n_columns);
    const Eigen::VectorXd v_old = v_.segment(form.first, form.n_columns);
    const Eigen::VectorXd u_old = lower.transpose() * v_old;
    const Eigen::MatrixXd half = lower.solve(z_block);
    const Eigen::MatrixXd a = lower.solve(half.transpose());
    const double curvature = std::max(a.trace(), kSmallestCurvature);
    const Eigen::VectorXd gradient = lower.solve(
        Eigen::VectorXd(problem_.b.segment(form.first, form.n_columns) - zv_.segment(form.first, form.n_columns)));
    const Eigen::VectorXd target = curvature * u_old + gradient;
    const double others = std::max(0.0, total - u_old.norm());
    const double root = std::sqrt(lambda_ * static_cast<double>(form.n_columns));
    const double x = shrink(target.norm(), 1.0, curvature, others, root, problem_.open[j].must);
    const Eigen::VectorXd u = target.norm() > 0.0 ? Eigen::VectorXd(target * (x / target.norm())) : target;
    total = others + x;
    const double change = (u - u_old).squaredNorm();
    if (change == 0.0) return 0.0;
    const Eigen::VectorXd moved = lower.transpose().solve(u) - v_old;
    zv_.noalias() += z_.middleCols(form.first, form.n_columns) * moved;
    v_.segment(form.first, form.n_columns) += moved;
    return change * (curvature + 1.0);
  }

  const Reduced& problem_;
  const Eigen::MatrixXd& z_;
  FormScales scales_;
  double lambda_;
  Eigen::VectorXd& v_;
  Eigen::VectorXd zv_;
};

}  // namespace

std::size_t coordinate_descent(const Reduced& problem, const Eigen::MatrixXd& z, const Eigen::MatrixXd& d,
                               double lambda, std::size_t most_sweeps, Eigen::VectorXd& v) {
  Descent descent(problem, z, d, lambda, v);
  double last = 0.0;
  for (std::size_t sweep = 0; sweep < most_sweeps; ++sweep) {
    if (descent.sweep() < kSmallChange_rel * lambda) return sweep + 1;
    if (sweep % kSweepsBetweenLooks != kSweepsBetweenLooks - 1) continue;
    const double value = descent.value();
    if (sweep >= kSweepsBetweenLooks && value - last < kSmallGain_rel * lambda) return sweep + 1;
    last = value;
  }
  return most_sweeps;
}

}  // namespace formsieve::proof

#include "proof/newton_system.hpp"

#include "proof/newton_kernel.hpp"

#include <Eigen/Cholesky>

#include <algorithm>
#include <cmath>
#include <numbers>

namespace formsieve::proof {

namespace {

constexpr double kRoot2 = std::numbers::sqrt2;

bool is_finite(const Lines& lines) {
  return std::all_of(lines.begin(), lines.end(), [](const Line& line) {
    return std::all_of(std::begin(line.at), std::end(line.at), [](double value) { return std::isfinite(value); });
  });
}

/// The inverse of the transpose of the factor of a positive definite matrix, in its place; false where it is not. Upper
/// triangular, zero below.
bool invert_root(Eigen::Ref<Eigen::MatrixXd> matrix, Eigen::Ref<Eigen::MatrixXd> root) {
  const Eigen::LLT<Eigen::Ref<Eigen::MatrixXd>> cholesky(matrix);
  if (cholesky.info() != Eigen::Success) return false;
  root.setIdentity();
  matrix.triangularView<Eigen::Lower>().transpose().solveInPlace(root);
  return true;
}

}  // namespace

NewtonSystem::NewtonSystem(const Reduced& problem)
    : problem_(&problem), lanes_(problem), gradient_(lanes_.n_lines()), kernel_work_(kernel_work(lanes_)) {
  std::size_t most = 1;
  for (const OpenPredictor& predictor : problem.open) {
    most = std::max(most, static_cast<std::size_t>(predictor.n_columns) + 1);
  }
  for (std::vector<double>* work : {&square_, &product_, &v_, &columns_}) work->resize(most * most);
  z_.resize(most);
}

NewtonSystem::Small NewtonSystem::small(std::vector<double>& work, std::size_t order) const {
  return {work.data(), static_cast<Eigen::Index>(order), static_cast<Eigen::Index>(order)};
}

bool NewtonSystem::build(const Variables& at, const Factor& factor, const Prices& prices, double mu) {
  mu_ = mu;
  invert_factored(factor.lower, inverse_work_, inverse_);
  x_ = factor.residual;
  solve_transposed(factor.lower, x_.data()->at);
  for (std::size_t j = 0; j < lanes_.places().size(); ++j)
    if (!set_basis(j)) return false;
  gather_blocks();
  for (std::size_t j = 0; j < lanes_.places().size(); ++j) change_basis(lanes_, j, kernel_work_.data());
  std::fill(gradient_.begin(), gradient_.end(), Line());
  for (std::size_t j = 0; j < lanes_.places().size(); ++j) add_predictor(j, at);
  add_prices(at, prices);
  return is_finite(gradient_);
}

/// R of one predictor, and x in it.
bool NewtonSystem::set_basis(std::size_t j) {
  const LanePlace& place = lanes_.places()[j];
  const auto first = static_cast<Eigen::Index>(place.first), q = static_cast<Eigen::Index>(place.n_columns);
  Small block = small(product_, place.n_columns), root = small(square_, place.n_columns);
  block = inverse_.matrix().block(first, first, q, q);
  if (!invert_root(block, root)) return false;
  LaneGroup& group = lanes_.groups()[place.group];
  for (std::size_t i = 0; i < place.n_columns; ++i)
    for (std::size_t k = i; k < place.n_columns; ++k)
      group.basis[i * group.n_columns + k].at[place.lane] = square_[i + k * place.n_columns];
  double* const x = x_.data()->at + place.first;
  for (std::size_t k = place.n_columns; k-- > 0;) {
    double sum = 0.0;
    for (std::size_t i = 0; i <= k; ++i) sum += square_[i + k * place.n_columns] * x[i];
    x[k] = sum;
  }
  return true;
}

void NewtonSystem::gather_blocks() {
  for (std::size_t j = 0; j < lanes_.places().size(); ++j)
    for (std::size_t k = 0; k <= j; ++k) {
      const LanePlace& below = lanes_.places()[j];
      const LanePlace& right = lanes_.places()[k];
      const std::size_t below_order = lanes_.groups()[below.group].n_columns;
      const std::size_t right_order = lanes_.groups()[right.group].n_columns;
      Line* const by_below = lanes_.block(j, right.group);
      Line* const by_right = lanes_.block(k, below.group);
      for (std::size_t b = 0; b < right.n_columns; ++b) {
        const double* const column = inverse_.column(right.first + b) + below.first;
        for (std::size_t a = j == k ? b : 0; a < below.n_columns; ++a) {
          by_below[a * right_order + b].at[right.lane] = column[a];
          by_right[b * below_order + a].at[below.lane] = column[a];
        }
      }
    }
}

/// The slopes in D̃ and w are x xᵀ − μI and 2x, since −x xᵀ in D̃ is joined by 2x xᵀ through g̃ = w + D̃x; then the
/// barrier.
void NewtonSystem::add_predictor(std::size_t j, const Variables& at) {
  const LanePlace& place = lanes_.places()[j];
  LaneGroup& group = lanes_.groups()[place.group];
  const double* const x = x_.data()->at + place.first;
  Line* const slope = gradient_.data() + group.first;
  for (std::size_t i = 0; i < place.n_columns; ++i) {
    for (std::size_t k = i; k < place.n_columns; ++k)
      slope[upper_index(i, k, group.n_columns)].at[place.lane] = i == k ? x[i] * x[i] - mu_ : kRoot2 * x[i] * x[k];
    slope[group.n_own() + i].at[place.lane] = 2.0 * x[i];
  }
  const double u = at.u(static_cast<Eigen::Index>(j));
  const OpenPredictor& predictor = problem_->open[j];
  slope[group.n_entries()].at[place.lane] = predictor.must ? -1.0 : mu_ / u - 1.0;
  group.u_curvature.at[place.lane] = predictor.must ? 0.0 : mu_ / (u * u);
  std::size_t row = 0;
  for (const OpenForm& form : predictor.forms) {
    factor_form(form, at, u);
    add_form(j, form, row);
  }
}

/// V of one form.
bool NewtonSystem::factor_form(const OpenForm& form, const Variables& at, double u) {
  const Eigen::Index c = form.n_columns;
  form_order_ = static_cast<std::size_t>(c) + 1;
  if (c == 1) {
    const double d = at.d(form.first, form.first), g = at.g(form.first);
    const double root = std::sqrt(d), rest = std::sqrt(u + at.lambda - g * g / d);
    v_[0] = 1.0 / root;
    v_[1] = 0.0;
    v_[2] = -g / (d * rest);
    v_[3] = 1.0 / rest;
    return true;
  }
  Small b = small(product_, form_order_);
  b.topLeftCorner(c, c) = at.d.block(form.first, form.first, c, c);
  b.bottomLeftCorner(1, c) = at.g.segment(form.first, c).transpose();
  b(c, c) = u + static_cast<double>(c) * at.lambda;
  return invert_root(b, small(v_, form_order_));
}

void NewtonSystem::add_form(std::size_t j, const OpenForm& form, std::size_t& row) {
  const LanePlace& place = lanes_.places()[j];
  LaneGroup& group = lanes_.groups()[place.group];
  const std::size_t c = form_order_ - 1, q = place.n_columns;
  const std::size_t own = static_cast<std::size_t>(form.first) - place.first;
  for (std::size_t k = 0; k <= c; ++k)
    for (std::size_t i = 0; i < q; ++i) {
      double sum = 0.0;
      for (std::size_t f = 0; f < c && own + f <= i; ++f)
        sum += group.basis[(own + f) * group.n_columns + i].at[place.lane] * v_[f + k * form_order_];
      columns_[i + k * q] = sum;
    }
  for (std::size_t k = 0; k <= c; ++k)
    for (std::size_t l = 0; l <= k; ++l, ++row) add_row(j, row, k, l, static_cast<double>(c));
}

void NewtonSystem::add_row(std::size_t j, std::size_t row, std::size_t k, std::size_t l, double n_columns) {
  const LanePlace& place = lanes_.places()[j];
  LaneGroup& group = lanes_.groups()[place.group];
  const std::size_t q = place.n_columns, lane = place.lane;
  const double weight = k == l ? 1.0 : kRoot2;
  const double by_k = weight * v_[form_order_ - 1 + k * form_order_], by_l = v_[form_order_ - 1 + l * form_order_];
  const double* const left = columns_.data() + k * q;
  const double* const right = columns_.data() + l * q;
  const double* const x = x_.data()->at + place.first;
  Line* const jacobian = group.jacobian.data() + row * group.n_variables();
  for (std::size_t i = 0; i < q; ++i) z_[i] = weight * by_l * left[i] + by_k * right[i];
  for (std::size_t i = 0; i < q; ++i) {
    jacobian[upper_index(i, i, group.n_columns)].at[lane] = weight * left[i] * right[i] + z_[i] * x[i];
    for (std::size_t m = i + 1; m < q; ++m)
      jacobian[upper_index(i, m, group.n_columns)].at[lane] =
          (weight * (left[i] * right[m] + left[m] * right[i]) + z_[i] * x[m] + z_[m] * x[i]) / kRoot2;
    jacobian[group.n_own() + i].at[lane] = z_[i];
  }
  jacobian[group.n_entries()].at[lane] = by_k * by_l;
  group.by_lambda[row].at[lane] = by_k * by_l * n_columns;
  if (k != l) return;
  Line* const slope = gradient_.data() + group.first;
  for (std::size_t i = 0; i < group.n_variables(); ++i) slope[i].at[lane] += mu_ * jacobian[i].at[lane];
  gradient_.back().at[kLambdaLane] += mu_ * group.by_lambda[row].at[lane];
}

void NewtonSystem::add_prices(const Variables& at, const Prices& prices) {
  const double fewest = 1.0 / prices.slack_fewest(at), most = 1.0 / prices.slack_most(at);
  const double inside = 1.0 / at.lambda, to_bound = 1.0 / (prices.most_lambda - at.lambda);
  const Eigen::Vector2d by_fewest(-prices.k_fewest * fewest, fewest), by_most(-prices.k_most * most, most);
  const Eigen::Vector2d slope = mu_ * (by_fewest + by_most);
  gradient_.back().at[kLambdaLane] += slope(0) + mu_ * (inside - to_bound);
  gradient_.back().at[kSLane] = slope(1) - 1.0;
  price_curvature_ = mu_ * (by_fewest * by_fewest.transpose() + by_most * by_most.transpose());
  price_curvature_(0, 0) += mu_ * (inside * inside + to_bound * to_bound);
}

void NewtonSystem::multiply(const Lines& in, Lines& out) {
  const Line& in_prices = in.back();
  const Eigen::Vector2d prices(in_prices.at[kLambdaLane], in_prices.at[kSLane]);
  const Eigen::Vector2d image = price_curvature_ * prices;
  double to_lambda = image(0);
  for (const LaneGroup& group : lanes_.groups())
    to_lambda += multiply_own(group, mu_, prices(0), in.data() + group.first, out.data() + group.first);
  multiply_blocks(lanes_, mu_, in.data(), out.data(), kernel_work_.data());
  out.back() = Line();
  out.back().at[kLambdaLane] = to_lambda;
  out.back().at[kSLane] = image(1);
}

void NewtonSystem::expand(const Lines& solution, Variables& direction) {
  for (std::size_t j = 0; j < lanes_.places().size(); ++j) {
    const LanePlace& place = lanes_.places()[j];
    const LaneGroup& group = lanes_.groups()[place.group];
    const std::size_t q = place.n_columns;
    Small d = small(square_, q), product = small(product_, q), root = small(columns_, q);
    const Line* const from = solution.data() + group.first;
    const auto at = [&](std::size_t line) { return from[line].at[place.lane]; };
    root.setZero();
    for (std::size_t i = 0; i < q; ++i)
      for (std::size_t k = i; k < q; ++k) {
        const double entry = at(upper_index(i, k, group.n_columns));
        square_[i + k * q] = square_[k + i * q] = i == k ? entry : entry / kRoot2;
        columns_[i + k * q] = group.basis[i * group.n_columns + k].at[place.lane];
      }
    const auto first = static_cast<Eigen::Index>(place.first), n = static_cast<Eigen::Index>(q);
    const Eigen::Map<const Eigen::VectorXd> x(x_.data()->at + place.first, n);
    Eigen::Map<Eigen::VectorXd> w(z_.data(), n);
    for (std::size_t i = 0; i < q; ++i) z_[i] = at(group.n_own() + i);
    w += d.lazyProduct(x);
    direction.g.segment(first, n) = root.lazyProduct(w);
    product = root.lazyProduct(d);
    auto block = direction.d.block(first, first, n, n);
    block = product.lazyProduct(root.transpose());
    block.triangularView<Eigen::StrictlyUpper>() = block.transpose();  // to the last bit
    direction.u(static_cast<Eigen::Index>(j)) = at(group.n_entries());
  }
  direction.lambda = solution.back().at[kLambdaLane];
  direction.s = solution.back().at[kSLane];
}

}  // namespace formsieve::proof

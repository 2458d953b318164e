#include "proof/newton_system.hpp"

#include <Eigen/Cholesky>

#include <cmath>
#include <numbers>

namespace formsieve::proof {

namespace {

constexpr double kRoot2 = std::numbers::sqrt2;

/// Entries of a linear function of a symmetric matrix D̃ ↦ tr(C D̃), C of any shape, in the order of `unpack`.
template <class Out>
void pack(const Eigen::MatrixXd& c, Out&& entries) {
  Eigen::Index at = 0;
  for (Eigen::Index i = 0; i < c.rows(); ++i) {
    entries(at++) = c(i, i);
    for (Eigen::Index k = i + 1; k < c.cols(); ++k) entries(at++) = (c(i, k) + c(k, i)) / kRoot2;
  }
}

}  // namespace

void unpack(const double* entries, Eigen::Ref<Eigen::MatrixXd> matrix) {
  for (Eigen::Index i = 0; i < matrix.rows(); ++i) {
    matrix(i, i) = *entries++;
    for (Eigen::Index k = i + 1; k < matrix.cols(); ++k) matrix(i, k) = matrix(k, i) = *entries++ / kRoot2;
  }
}

NewtonSystem::NewtonSystem(const Reduced& problem) : problem_(&problem) {
  Eigen::Index offset = 0;
  for (const OpenPredictor& predictor : problem.open) {
    PredictorTerms terms;
    terms.first = predictor.first;
    terms.n_columns = predictor.n_columns;
    terms.offset = offset;
    terms.n_entries = predictor.n_columns * (predictor.n_columns + 1) / 2;
    Eigen::Index n_rows = 0;
    for (const OpenForm& form : predictor.forms) n_rows += (form.n_columns + 1) * (form.n_columns + 2) / 2;
    terms.jacobian.resize(n_rows, terms.n_variables());
    terms.by_lambda.resize(n_rows);
    offset += terms.n_variables();
    terms_.push_back(std::move(terms));
  }
  gradient_.resize(offset + 2);
}

bool NewtonSystem::build(const Variables& at, const Factor& factor, const Prices& prices, double mu) {
  mu_ = mu;
  if (!change_basis(at, factor)) return false;
  gradient_.setZero();
  for (std::size_t j = 0; j < terms_.size(); ++j) {
    add_main_slope(terms_[j]);
    add_predictor(j, at);
  }
  add_prices(at, prices);
  return gradient_.allFinite();
}

bool NewtonSystem::change_basis(const Variables&, const Factor& factor) {
  const Eigen::Index n = factor.lower.rows();
  a_.setIdentity(n, n);
  factor.lower.triangularView<Eigen::Lower>().solveInPlace(a_);  // A = L⁻ᵀL⁻¹
  x_ = a_.transpose() * factor.residual;
  product_.setZero(n, n);
  product_.selfadjointView<Eigen::Lower>().rankUpdate(a_.transpose());
  a_ = product_.selfadjointView<Eigen::Lower>();
  for (PredictorTerms& terms : terms_) {
    const Eigen::LLT<Eigen::MatrixXd> cholesky(a_.block(terms.first, terms.first, terms.n_columns, terms.n_columns));
    if (cholesky.info() != Eigen::Success) return false;
    terms.basis.setIdentity(terms.n_columns, terms.n_columns);
    cholesky.matrixU().solveInPlace(terms.basis);
  }
  for (const PredictorTerms& terms : terms_) {
    x_.segment(terms.first, terms.n_columns) =
        (terms.basis.transpose() * x_.segment(terms.first, terms.n_columns)).eval();
    a_.middleRows(terms.first, terms.n_columns) =
        (terms.basis.transpose() * a_.middleRows(terms.first, terms.n_columns)).eval();
    a_.middleCols(terms.first, terms.n_columns) = (a_.middleCols(terms.first, terms.n_columns) * terms.basis).eval();
  }
  return true;
}

/// In D̃ and w the slopes are x xᵀ − μI and 2x: w takes −2x xᵀ out of D̃'s own −x xᵀ … with g̃ = w + D̃x.
void NewtonSystem::add_main_slope(const PredictorTerms& terms) {
  const auto x = x_.segment(terms.first, terms.n_columns);
  Eigen::MatrixXd slope = x * x.transpose();
  slope.diagonal().array() -= mu_;
  pack(slope, gradient_.segment(terms.offset, terms.n_entries));
  gradient_.segment(terms.w(), terms.n_columns) = 2.0 * x;
}

void NewtonSystem::add_predictor(std::size_t j, const Variables& at) {
  PredictorTerms& terms = terms_[j];
  const double u = at.u(static_cast<Eigen::Index>(j));
  double& u_slope = gradient_(terms.u());
  u_slope -= 1.0;
  terms.u_curvature = 0.0;
  if (!problem_->open[j].must) {
    u_slope += mu_ / u;
    terms.u_curvature = mu_ / (u * u);
  }
  Eigen::Index row = 0;
  for (const OpenForm& form : problem_->open[j].forms) add_form(form, at, u, terms, row);
}

void NewtonSystem::add_form(const OpenForm& form, const Variables& at, double u, PredictorTerms& terms,
                            Eigen::Index& row) {
  const Eigen::Index c = form.n_columns, q = terms.n_columns;
  const auto x = x_.segment(terms.first, q);
  Eigen::MatrixXd b(c + 1, c + 1);
  b.topLeftCorner(c, c) = at.d.block(form.first, form.first, c, c);
  b.bottomLeftCorner(1, c) = at.g.segment(form.first, c).transpose();
  b(c, c) = u + static_cast<double>(c) * at.lambda;
  Eigen::MatrixXd v = Eigen::MatrixXd::Identity(c + 1, c + 1);
  const Eigen::LLT<Eigen::MatrixXd> cholesky(b);
  cholesky.matrixU().solveInPlace(v);
  const Eigen::MatrixXd p = terms.basis.middleRows(form.first - terms.first, c).transpose() * v.topRows(c);
  for (Eigen::Index k = 0; k <= c; ++k)
    for (Eigen::Index l = 0; l <= k; ++l, ++row) {
      const double weight = k == l ? 1.0 : kRoot2;
      const double both = v(c, k) * v(c, l);
      const Eigen::VectorXd z = weight * (v(c, l) * p.col(k) + v(c, k) * p.col(l));
      const Eigen::MatrixXd by_d = weight * p.col(k) * p.col(l).transpose() + z * x.transpose();
      auto jacobian = terms.jacobian.row(row);
      pack(by_d, jacobian.head(terms.n_entries));
      jacobian.tail(q) = z.transpose();
      jacobian(terms.n_entries) = weight * both;
      terms.by_lambda(row) = weight * both * static_cast<double>(c);
      if (k != l) continue;
      gradient_.segment(terms.offset, terms.n_variables()) += mu_ * jacobian.transpose();
      gradient_(gradient_.size() - 2) += mu_ * terms.by_lambda(row);
    }
}

void NewtonSystem::add_prices(const Variables& at, const Prices& prices) {
  const double fewest = 1.0 / prices.slack_fewest(at), most = 1.0 / prices.slack_most(at);
  const double inside = 1.0 / at.lambda, to_bound = 1.0 / (prices.most_lambda - at.lambda);
  const Eigen::Vector2d by_fewest(-prices.k_fewest * fewest, fewest), by_most(-prices.k_most * most, most);
  gradient_.tail(2) += mu_ * (by_fewest + by_most);
  gradient_(gradient_.size() - 2) += mu_ * (inside - to_bound);
  gradient_(gradient_.size() - 1) -= 1.0;
  price_curvature_ = mu_ * (by_fewest * by_fewest.transpose() + by_most * by_most.transpose());
  price_curvature_(0, 0) += mu_ * (inside * inside + to_bound * to_bound);
}

void NewtonSystem::multiply(const Eigen::VectorXd& in, Eigen::VectorXd& out) {
  const Eigen::Index n = a_.rows(), lambda = in.size() - 2;
  out.resize(in.size());
  out.tail(2) = price_curvature_ * in.tail(2);
  product_.resize(n, n);
  w_.resize(n);
  for (const PredictorTerms& terms : terms_) {
    Eigen::MatrixXd d(terms.n_columns, terms.n_columns);
    unpack(in.data() + terms.offset, d);
    product_.middleCols(terms.first, terms.n_columns).noalias() = a_.middleCols(terms.first, terms.n_columns) * d;
    w_.segment(terms.first, terms.n_columns) = in.segment(terms.w(), terms.n_columns);
  }
  image_.noalias() = 2.0 * (a_ * w_);
  for (const PredictorTerms& terms : terms_) {
    const Eigen::MatrixXd d =
        mu_ * product_.middleRows(terms.first, terms.n_columns) * a_.middleCols(terms.first, terms.n_columns);
    pack(d, out.segment(terms.offset, terms.n_entries));
    out.segment(terms.w(), terms.n_columns) = image_.segment(terms.first, terms.n_columns);
    out(terms.u()) = terms.u_curvature * in(terms.u());
    const Eigen::VectorXd rows =
        mu_ * (terms.jacobian * in.segment(terms.offset, terms.n_variables()) + in(lambda)*terms.by_lambda);
    out.segment(terms.offset, terms.n_variables()) += terms.jacobian.transpose() * rows;
    out(lambda) += terms.by_lambda.dot(rows);
  }
}

void NewtonSystem::expand(const Eigen::VectorXd& solution, Variables& direction) const {
  direction.d.setZero(a_.rows(), a_.cols());
  direction.g.resize(a_.rows());
  direction.u.resize(static_cast<Eigen::Index>(terms_.size()));
  for (std::size_t j = 0; j < terms_.size(); ++j) {
    const PredictorTerms& terms = terms_[j];
    const Eigen::Index q = terms.n_columns;
    Eigen::MatrixXd d(q, q);
    unpack(solution.data() + terms.offset, d);
    auto block = direction.d.block(terms.first, terms.first, q, q);
    block = terms.basis * d * terms.basis.transpose();
    block.triangularView<Eigen::StrictlyUpper>() = block.transpose();  // to the last bit
    const Eigen::VectorXd g = solution.segment(terms.w(), q) + d * x_.segment(terms.first, q);
    direction.g.segment(terms.first, q) = terms.basis * g;
    direction.u(static_cast<Eigen::Index>(j)) = solution(terms.u());
  }
  direction.lambda = solution(solution.size() - 2);
  direction.s = solution(solution.size() - 1);
}

}  // namespace formsieve::proof

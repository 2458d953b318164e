#include "plain_newton.hpp"

#include <Eigen/Cholesky>
#include <Eigen/LU>

#include <vector>

namespace formsieve::test {

namespace {

using Eigen::Index;

/// One of the places where a variable stands in a matrix: E = Σ weight · e_row e_columnᵀ.
struct Place {
  Index row, column;
  double weight;
};

/// A variable: its places in D, and the entry of g that it is, if any.
struct Variable {
  std::vector<Place> in_d;
  Index in_g = -1;
};

std::vector<Place> symmetric(Index row, Index column, double weight = 1.0) {
  if (row == column) return {{row, column, weight}};
  return {{row, column, weight}, {column, row, weight}};
}

std::vector<Variable> variables_of(const proof::Reduced& node) {
  std::vector<Variable> variables;
  for (const proof::OpenPredictor& predictor : node.open) {
    const Index first = predictor.first, end = first + predictor.n_columns;
    for (Index column = first; column < end; ++column)
      for (Index row = column; row < end; ++row) variables.push_back({symmetric(row, column)});
    for (Index i = first; i < end; ++i) variables.push_back({{}, i});
    variables.push_back({});
  }
  variables.resize(variables.size() + 2);
  return variables;
}

/// tr(A E A E′).
double trace(const Eigen::MatrixXd& a, const std::vector<Place>& e, const std::vector<Place>& other) {
  double sum = 0.0;
  for (const Place& p : e)
    for (const Place& q : other) sum += p.weight * q.weight * a(q.column, p.row) * a(p.column, q.row);
  return sum;
}

/// (Ex − e)ᵀA(E′x − e′).
double product(const Eigen::MatrixXd& a, const Eigen::VectorXd& x, const Variable& left, const Variable& right) {
  double sum = 0.0;
  const auto against = [&](Index row, double factor) {
    for (const Place& q : right.in_d) sum += factor * a(row, q.row) * x(q.column) * q.weight;
    if (right.in_g >= 0) sum -= factor * a(row, right.in_g);
  };
  for (const Place& p : left.in_d) against(p.row, x(p.column) * p.weight);
  if (left.in_g >= 0) against(left.in_g, -1.0);
  return sum;
}

void add_main(const proof::Reduced& node, double mu, const proof::Variables& at, PlainSystem& system) {
  const std::vector<Variable> variables = variables_of(node);
  const Eigen::MatrixXd a = (node.m - at.d).llt().solve(Eigen::MatrixXd::Identity(node.m.rows(), node.m.cols()));
  const Eigen::VectorXd x = a * (node.b - at.g);
  for (std::size_t i = 0; i < variables.size(); ++i) {
    const auto row = static_cast<Index>(i);
    for (const Place& p : variables[i].in_d)
      system.gradient(row) -= p.weight * (x(p.row) * x(p.column) + mu * a(p.row, p.column));
    if (variables[i].in_g >= 0) system.gradient(row) += 2.0 * x(variables[i].in_g);
    for (std::size_t k = 0; k <= i; ++k)
      system.hessian(row, static_cast<Index>(k)) +=
          mu * trace(a, variables[i].in_d, variables[k].in_d) + 2.0 * product(a, x, variables[i], variables[k]);
  }
}

/// Adds μ ln det B, B a symmetric matrix in which variables stand at some places.
void add_barrier(double mu, const Eigen::MatrixXd& b, const std::vector<std::pair<Index, std::vector<Place>>>& in_b,
                 PlainSystem& system) {
  const Eigen::MatrixXd inverse = b.inverse();
  for (const auto& [i, places] : in_b) {
    for (const Place& p : places) system.gradient(i) += mu * p.weight * inverse(p.column, p.row);
    for (const auto& [k, others] : in_b)
      if (k <= i) system.hessian(i, k) += mu * trace(inverse, places, others);
  }
}

void add_form(const proof::Reduced& node, double mu, const proof::Variables& at, std::size_t j, Index offset,
              const proof::OpenForm& form, PlainSystem& system) {
  const proof::OpenPredictor& predictor = node.open[j];
  const Index c = form.n_columns, own = form.first - predictor.first, q = predictor.n_columns;
  const Index entries = q * (q + 1) / 2, lambda = system.gradient.size() - 2;
  const auto columns = static_cast<double>(c);
  Eigen::MatrixXd b(c + 1, c + 1);
  b << at.d.block(form.first, form.first, c, c), at.g.segment(form.first, c), at.g.segment(form.first, c).transpose(),
      at.u(static_cast<Index>(j)) + columns * at.lambda;
  std::vector<std::pair<Index, std::vector<Place>>> in_b;
  for (Index column = 0; column < c; ++column) {
    const Index k = own + column;
    for (Index row = column; row < c; ++row)
      in_b.emplace_back(offset + k * q - k * (k + 1) / 2 + own + row, symmetric(row, column));
    in_b.emplace_back(offset + entries + k, symmetric(c, column));
  }
  in_b.emplace_back(offset + entries + q, symmetric(c, c));
  in_b.emplace_back(lambda, symmetric(c, c, columns));
  add_barrier(mu, b, in_b, system);
}

}  // namespace

PlainSystem plain_system(const proof::Reduced& node, const proof::Prices& prices, double mu,
                         const proof::Variables& at) {
  const auto n = static_cast<Index>(variables_of(node).size());
  PlainSystem system{Eigen::VectorXd::Zero(n), Eigen::MatrixXd::Zero(n, n)};
  add_main(node, mu, at, system);
  const Index lambda = n - 2, s = n - 1;
  const auto scalar = [](double value) { return Eigen::MatrixXd::Constant(1, 1, value); };
  Index offset = 0;
  for (std::size_t j = 0; j < node.open.size(); ++j) {
    const Index q = node.open[j].n_columns, u = offset + q * (q + 1) / 2 + q;
    system.gradient(u) -= 1.0;
    if (!node.open[j].must) add_barrier(mu, scalar(at.u(static_cast<Index>(j))), {{u, symmetric(0, 0)}}, system);
    for (const proof::OpenForm& form : node.open[j].forms) add_form(node, mu, at, j, offset, form, system);
    offset = u + 1;
  }
  system.gradient(s) -= 1.0;
  for (const auto& [slack, k] :
       {std::pair(prices.slack_fewest(at), prices.k_fewest), std::pair(prices.slack_most(at), prices.k_most)})
    add_barrier(mu, scalar(slack), {{lambda, symmetric(0, 0, -k)}, {s, symmetric(0, 0)}}, system);
  add_barrier(mu, scalar(at.lambda), {{lambda, symmetric(0, 0)}}, system);
  add_barrier(mu, scalar(prices.most_lambda - at.lambda), {{lambda, symmetric(0, 0, -1.0)}}, system);
  return system;
}

}  // namespace formsieve::test

#include "nodes.hpp"

#include <Eigen/Cholesky>

#include <algorithm>
#include <cmath>
#include <functional>
#include <limits>
#include <random>

namespace formsieve::test {

namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();

std::vector<proof::OpenPredictor> predictors_of(const std::vector<PredictorShape>& shapes) {
  std::vector<proof::OpenPredictor> predictors;
  Eigen::Index first = 0;
  for (std::size_t j = 0; j < shapes.size(); ++j) {
    proof::OpenPredictor predictor{j, shapes[j].must, first, 0, {}};
    for (std::size_t f = 0; f < shapes[j].forms.size(); ++f) {
      predictor.forms.push_back({f, first, shapes[j].forms[f]});
      first += shapes[j].forms[f];
    }
    predictor.n_columns = first - predictor.first;
    predictors.push_back(std::move(predictor));
  }
  return predictors;
}

/// Largest of g_fᵀ D_ff⁻¹ g_f − c_f λ, and 0 where absence is allowed; NaN where a D_ff is not positive definite.
double largest_charge(const proof::OpenPredictor& predictor, const proof::DualPoint& point) {
  double largest = predictor.must ? -kInfinity : 0.0;
  for (const proof::OpenForm& form : predictor.forms) {
    const Eigen::MatrixXd d = point.d.block(form.first, form.first, form.n_columns, form.n_columns);
    const Eigen::VectorXd g = point.g.segment(form.first, form.n_columns);
    if (d.llt().info() != Eigen::Success) return std::nan("");
    largest = std::max(largest, g.dot(d.llt().solve(g)) - static_cast<double>(form.n_columns) * point.lambda);
  }
  return largest;
}

double end(const proof::Reduced& node, std::size_t k, double tau, double lambda) {
  return (static_cast<double>(k) - static_cast<double>(node.fixed_columns)) * lambda + tau;
}

void visit(const proof::Reduced& node, std::size_t j, std::vector<Eigen::Index>& columns,
           const std::function<void(const std::vector<Eigen::Index>&)>& use) {
  if (j == node.open.size()) return use(columns);
  if (!node.open[j].must) visit(node, j + 1, columns, use);
  for (const proof::OpenForm& form : node.open[j].forms) {
    for (Eigen::Index c = 0; c < form.n_columns; ++c) columns.push_back(form.first + c);
    visit(node, j + 1, columns, use);
    columns.resize(columns.size() - static_cast<std::size_t>(form.n_columns));
  }
}

double rss_of(const proof::Reduced& node, const std::vector<Eigen::Index>& columns) {
  if (columns.empty()) return node.yy;
  const Eigen::MatrixXd m = node.m(columns, columns);
  const Eigen::VectorXd b = node.b(columns);
  return node.yy - b.dot(m.ldlt().solve(b));
}

}  // namespace

proof::Reduced make_node(std::uint64_t seed, Eigen::Index n_rows, const std::vector<PredictorShape>& shapes,
                         double nearness, double noise) {
  std::mt19937_64 random(seed);
  std::normal_distribution<double> normal;
  const auto draw = [&] { return Eigen::VectorXd::NullaryExpr(n_rows, [&] { return normal(random); }).eval(); };
  proof::Reduced node;
  node.open = predictors_of(shapes);
  Eigen::MatrixXd x(n_rows, node.open.back().first + node.open.back().n_columns);
  Eigen::VectorXd y = noise * draw();
  for (const proof::OpenPredictor& predictor : node.open) {
    const Eigen::VectorXd common = draw();
    for (Eigen::Index c = 0; c < predictor.n_columns; ++c)
      x.col(predictor.first + c) = (common + nearness * draw()).normalized();
    if (3 * predictor.predictor < shapes.size())
      y += std::sqrt(static_cast<double>(n_rows)) * x.col(predictor.first + predictor.n_columns / 2);
  }
  y.normalize();
  node.m = x.transpose() * x;
  node.b = x.transpose() * y;
  node.fixed.assign(shapes.size(), 0);
  return node;
}

proof::ColumnRange whole_range(const proof::Reduced& node, double level, double price) {
  proof::ColumnRange range;
  for (const proof::OpenPredictor& predictor : node.open) {
    Eigen::Index least = predictor.must ? predictor.n_columns : 0, most = 0;
    for (const proof::OpenForm& form : predictor.forms) {
      least = std::min(least, form.n_columns);
      most = std::max(most, form.n_columns);
    }
    range.fewest += static_cast<std::size_t>(least);
    range.most += static_cast<std::size_t>(most);
  }
  range.tau_fewest = level * std::exp(-price * static_cast<double>(range.fewest));
  range.tau_most = level * std::exp(-price * static_cast<double>(range.most));
  range.fewest += node.fixed_columns;
  range.most += node.fixed_columns;
  return range;
}

proof::DualPoint plain_start(const proof::Reduced& node, double lambda, double mu) {
  proof::DualPoint start;
  start.g.setZero(node.b.size());
  start.lambda = lambda;
  start.mu = mu;
  for (double eta = 0.3; eta > 1e-14; eta *= 0.6) {
    start.d.setZero(node.m.rows(), node.m.cols());
    for (const proof::OpenPredictor& predictor : node.open) {
      const Eigen::Index i = predictor.first, n = predictor.n_columns;
      start.d.block(i, i, n, n) = eta * node.m.block(i, i, n, n);
      for (const proof::OpenForm& form : predictor.forms) {
        const Eigen::Index f = form.first, c = form.n_columns;
        start.d.block(f, f, c, c) = 0.05 * eta * node.m.block(f, f, c, c);
      }
    }
    if ((node.m - start.d).llt().info() == Eigen::Success) break;
  }
  return start;
}

double dual_value(const proof::Reduced& node, const proof::ColumnRange& range, const proof::DualPoint& point) {
  const Eigen::LLT<Eigen::MatrixXd> factor(node.m - point.d);
  if (factor.info() != Eigen::Success) return -kInfinity;
  const Eigen::VectorXd rest = node.b - point.g;
  double value = node.yy - rest.dot(factor.solve(rest));
  for (const proof::OpenPredictor& predictor : node.open) value -= largest_charge(predictor, point);
  value -= std::max(end(node, range.fewest, range.tau_fewest, point.lambda),
                    end(node, range.most, range.tau_most, point.lambda));
  return std::isnan(value) ? -kInfinity : value;
}

double smallest_excess(const proof::Reduced& node, const proof::ColumnRange& range) {
  double smallest = kInfinity;
  std::vector<Eigen::Index> columns;
  visit(node, 0, columns, [&](const std::vector<Eigen::Index>& chosen) {
    const std::size_t k = node.fixed_columns + chosen.size();
    if (k < range.fewest || k > range.most) return;
    const double share = range.most == range.fewest
                             ? 0.0
                             : static_cast<double>(k - range.fewest) / static_cast<double>(range.most - range.fewest);
    const double tau = (1.0 - share) * range.tau_fewest + share * range.tau_most;
    smallest = std::min(smallest, rss_of(node, chosen) - tau);
  });
  return smallest;
}

}  // namespace formsieve::test

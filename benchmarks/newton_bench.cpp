// Newton's method on the dual of a node: a step by conjugate gradients against the same step by a dense system.
#include "nodes.hpp"
#include "plain_newton.hpp"
#include "proof/dense_kernel.hpp"
#include "proof/newton.hpp"
#include "stopwatch.hpp"

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <vector>

namespace formsieve::bench {

namespace {

constexpr int kMostSteps = 80;
/// μ at the start and at the end, times λ over the number of columns.
constexpr double kFirstMu = 200.0, kLastMu = 0.3;

struct Setting {
  proof::Reduced node;
  proof::ColumnRange range;
  proof::DualPoint start;
  double unit_mu = 0.0;
};

Setting make_setting(std::size_t n_predictors, std::size_t n_forms, Eigen::Index n_rows) {
  Setting setting;
  const test::PredictorShape shape{std::vector<Eigen::Index>(n_forms, 1)};
  setting.node = test::make_node(1, n_rows, std::vector<test::PredictorShape>(n_predictors, shape), 0.1);
  const double price = std::log(static_cast<double>(n_rows)) / static_cast<double>(n_rows), level = 0.5;
  const std::size_t fewest = n_predictors / 3, most = fewest + 6;
  setting.range = {fewest, most, level, level * std::exp(-price * static_cast<double>(most - fewest))};
  const double lambda = (setting.range.tau_fewest - setting.range.tau_most) / static_cast<double>(most - fewest);
  setting.unit_mu = lambda / static_cast<double>(setting.node.b.size());
  setting.start = test::plain_start(setting.node, lambda, kFirstMu * setting.unit_mu);
  return setting;
}

struct Path {
  int n_steps = 0, n_iterations = 0;
  double seconds = 0.0;
};

/// From the start to a small decrement at the last μ.
Path follow(const Setting& setting) {
  proof::Newton newton(setting.node, setting.range, setting.start);
  const double last = kLastMu * setting.unit_mu;
  Path path;
  while (path.n_steps < kMostSteps) {
    proof::Newton::Step step;
    path.seconds += thread_seconds([&] { step = newton.step(); });
    ++path.n_steps;
    path.n_iterations += step.iterations;
    if (!step.usable || (newton.mu() <= last && step.decrement < 0.5)) break;
    if (step.decrement < 6.0 && step.length > 0.4) newton.set_mu(std::max(last, 0.3 * newton.mu()));
  }
  return path;
}

struct DenseTimes {
  double assembly = 0.0, factor = 0.0;
};

DenseTimes time_dense(const Setting& setting) {
  const proof::Prices prices(setting.node, setting.range, setting.start.lambda);
  proof::Variables at{setting.start.d, setting.start.g, {}, setting.start.lambda, 0.0};
  at.u.setZero(static_cast<Eigen::Index>(setting.node.open.size()));
  if (!proof::centre(setting.node, prices, setting.start.mu, at)) return {};
  test::PlainSystem system;
  proof::PaddedMatrix matrix;
  DenseTimes times;
  times.assembly = thread_seconds([&] { system = test::plain_system(setting.node, prices, setting.start.mu, at); });
  times.factor = best_thread_seconds(5, [&] {
    matrix.set_lower(system.hessian);
    if (!proof::factor_lower(matrix)) std::printf("the dense system is not positive definite\n");
  });
  return times;
}

void print_line(std::size_t n_predictors, std::size_t n_forms, Eigen::Index n_rows) {
  const Setting setting = make_setting(n_predictors, n_forms, n_rows);
  const Path path = follow(setting);
  const DenseTimes dense = time_dense(setting);
  const double step = path.seconds / path.n_steps;
  std::printf("| %zu × %zu, n = %ld | %zu | %d | %.1f | %.2f | %.2f | %.1f | %.1f |\n", n_predictors, n_forms,
              static_cast<long>(n_rows), proof::Newton::n_variables(setting.node), path.n_steps,
              static_cast<double>(path.n_iterations) / path.n_steps, 1e3 * step, 1e3 * dense.factor,
              1e3 * dense.assembly, dense.factor / step);
  std::fflush(stdout);
}

}  // namespace

}  // namespace formsieve::bench

int main() {
  std::printf(
      "| predictors × forms | variables | steps | iterations a step | ms a step, everything | dense: ms for the factor "
      "alone, by the same kernel | ms for a plain assembly | factor alone / step "
      "|\n|---|---|---|---|---|---|---|---|\n");
  formsieve::bench::print_line(20, 6, 300);
  formsieve::bench::print_line(40, 6, 300);
  formsieve::bench::print_line(40, 6, 150);
  formsieve::bench::print_line(60, 6, 1000);
}

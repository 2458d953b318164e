#include "fit/s_estimate.hpp"

#include "base/random.hpp"

#include <Eigen/LU>

#include <algorithm>
#include <cmath>
#include <numeric>
#include <vector>

namespace formsieve::fit {

namespace {

using Eigen::Index;

constexpr std::uint64_t kSeed = 20060623;  // any fixed number
/// Rows on which candidates are compared, and on which the best is refined.
constexpr Index kCompareRows = 500;
constexpr Index kRefineRows = 20000;
constexpr int kFirstSteps = 2;
constexpr std::size_t kBest = 5;

/// `count` rows by the seed, in rising order; all of them when there are no more.
std::vector<Index> drawn_rows(Index n, Index count, base::SplitMix64& random) {
  std::vector<Index> rows(static_cast<std::size_t>(n));
  std::iota(rows.begin(), rows.end(), Index{0});
  if (count >= n) return rows;
  for (Index i = 0; i < count; ++i)
    std::swap(rows[static_cast<std::size_t>(i)],
              rows[static_cast<std::size_t>(i) + random.below(static_cast<std::uint64_t>(n - i))]);
  rows.resize(static_cast<std::size_t>(count));
  std::sort(rows.begin(), rows.end());
  return rows;
}

/// δ through p rows drawn by the seed; a row that depends on those drawn before is passed over (Koller & Stahel 2017).
/// Unset when the rows do not span the design.
std::optional<Eigen::VectorXd> through_few_rows(const Rows& rows, std::vector<Index>& shuffled,
                                                base::SplitMix64& random) {
  constexpr double kDependent = 1e-6;  // share of the row outside those before
  const Index p = rows.p();
  Eigen::MatrixXd directions(p, p);
  Eigen::MatrixXd system(p, p);
  Eigen::VectorXd target(p);
  Index found = 0;
  for (std::size_t i = 0; i < shuffled.size() && found < p; ++i) {
    std::swap(shuffled[i], shuffled[i + random.below(shuffled.size() - i)]);
    const Eigen::VectorXd row = rows.u.row(shuffled[i]).transpose();
    Eigen::VectorXd rest = row;
    for (int pass = 0; pass < 2; ++pass)
      rest -= directions.leftCols(found) * (directions.leftCols(found).transpose() * rest);
    if (rest.norm() <= kDependent * row.norm()) continue;
    directions.col(found) = rest.normalized();
    system.row(found) = row.transpose();
    target[found++] = rows.e[shuffled[i]];
  }
  if (found < p) return std::nullopt;
  return system.partialPivLu().solve(target);
}

/// One step of local improvement: weights at the scale given, then least squares; the scale follows by one step of its
/// own equation. False when the rows that keep weight do not span the design, or the scale is 0.
bool improve(const Rows& rows, SEstimate& at) {
  const Eigen::VectorXd r = rows.e - rows.u * at.delta;
  double total = 0.0;
  for (const double one : r) total += kHalfBreakdown.rho(one / at.scale);
  at.scale *= std::sqrt(2.0 * total / static_cast<double>(rows.n() - rows.p()));
  if (!(at.scale > 0.0)) return false;
  Eigen::VectorXd w(rows.n());
  for (Index i = 0; i < rows.n(); ++i) w[i] = kHalfBreakdown.weight(r[i] / at.scale);
  const auto next = reweighted(rows, w);
  if (!next) return false;
  at.delta = *next;
  return true;
}

/// Improves until nothing moves; the scale is then the M-scale. False as above.
bool improve_to_the_end(const Rows& rows, SEstimate& at) {
  constexpr int kMostSteps = 200;
  constexpr double kStill = 1e-9;
  for (int step = 0; step < kMostSteps; ++step) {
    const Eigen::VectorXd before = at.delta;
    if (!improve(rows, at)) return false;
    if ((at.delta - before).lpNorm<Eigen::Infinity>() <= kStill * at.scale) break;
  }
  at.scale = m_scale(rows.e - rows.u * at.delta, rows.p(), at.scale);
  return at.scale > 0.0;
}

/// Whether the M-scale of `r` lies below `limit`, by one sum.
bool is_below(const Eigen::VectorXd& r, Index p, double limit) {
  double total = 0.0;
  for (const double one : r) total += kHalfBreakdown.rho(one / limit);
  return total < 0.5 * static_cast<double>(r.size() - p);
}

/// A candidate after its first steps, with its M-scale; unset also when that is no smaller than `limit`.
std::optional<SEstimate> first_improved(const Rows& rows, Eigen::VectorXd delta, std::optional<double> limit) {
  SEstimate at{std::move(delta), 0.0};
  at.scale = median_scale(rows.e - rows.u * at.delta);
  if (!(at.scale > 0.0)) return std::nullopt;
  for (int step = 0; step < kFirstSteps; ++step)
    if (!improve(rows, at)) return std::nullopt;
  const Eigen::VectorXd r = rows.e - rows.u * at.delta;
  if (limit && !is_below(r, rows.p(), *limit)) return std::nullopt;
  at.scale = m_scale(r, rows.p(), at.scale);
  if (!(at.scale > 0.0)) return std::nullopt;
  return at;
}

/// The candidates of smallest scale so far, smallest first.
class Best {
 public:
  /// What a candidate must stay below to be kept.
  std::optional<double> limit() const {
    return kept_.size() < kBest ? std::nullopt : std::optional(kept_.back().scale);
  }
  void keep(std::optional<SEstimate> candidate) {
    if (!candidate) return;
    const auto smaller = [](const SEstimate& a, const SEstimate& b) { return a.scale < b.scale; };
    kept_.insert(std::upper_bound(kept_.begin(), kept_.end(), *candidate, smaller), *candidate);
    if (kept_.size() > kBest) kept_.pop_back();
  }
  std::vector<SEstimate>& kept() { return kept_; }

 private:
  std::vector<SEstimate> kept_;
};

std::optional<SEstimate> best_start(const Rows& rows, base::SplitMix64& random) {
  Best best;
  best.keep(first_improved(rows, Eigen::VectorXd::Zero(rows.p()), std::nullopt));
  std::vector<Index> shuffled(static_cast<std::size_t>(rows.n()));
  std::iota(shuffled.begin(), shuffled.end(), Index{0});
  for (std::size_t i = 0; i < n_candidates(rows.p()); ++i)
    if (auto delta = through_few_rows(rows, shuffled, random))
      best.keep(first_improved(rows, std::move(*delta), best.limit()));
  std::optional<SEstimate> first;
  for (SEstimate& candidate : best.kept())
    if (improve_to_the_end(rows, candidate) && (!first || candidate.scale < first->scale)) first = candidate;
  return first;
}

}  // namespace

std::size_t n_candidates(Index p) {
  constexpr double kGoodRows = 0.7;
  constexpr double kMiss = 1e-3;
  constexpr double kFewest = 50.0;
  constexpr double kMost = 300.0;
  const double clean = std::pow(kGoodRows, static_cast<double>(p));
  return static_cast<std::size_t>(std::clamp(std::ceil(std::log(kMiss) / std::log1p(-clean)), kFewest, kMost));
}

std::optional<SEstimate> s_estimate(const Rows& rows) {
  base::SplitMix64 random(kSeed);
  const auto few = drawn_rows(rows.n(), std::max(kCompareRows, 10 * rows.p()), random);
  const Eigen::MatrixXd few_u = rows.u(few, Eigen::all);
  const Eigen::VectorXd few_e = rows.e(few);
  auto found = best_start({few_u, few_e}, random);
  if (!found) return std::nullopt;
  if (rows.n() > static_cast<Index>(few.size())) {
    const auto more = drawn_rows(rows.n(), kRefineRows, random);
    const Eigen::MatrixXd more_u = rows.u(more, Eigen::all);
    const Eigen::VectorXd more_e = rows.e(more);
    if (!improve_to_the_end({more_u, more_e}, *found)) return std::nullopt;
  }
  found->scale = m_scale(rows.e - rows.u * found->delta, rows.p(), found->scale);
  if (!(found->scale > 0.0)) return std::nullopt;
  return found;
}

}  // namespace formsieve::fit

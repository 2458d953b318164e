#include "proof/leaf_bound.hpp"

#include "proof/block_sweep.hpp"
#include "proof/coordinate_descent.hpp"
#include "proof/first_blocks.hpp"
#include "proof/pace.hpp"
#include "proof/starting_point.hpp"

#include <algorithm>
#include <cmath>
#include <functional>

namespace formsieve::proof {

namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();
/// The unit λ as a share of the RSS at the threshold: descent stops at 1e-4 of it, the barrier costs a tenth of it.
constexpr double kUnit_rel = 0.01;

class RssBound {
 public:
  RssBound(const Frozen& frozen, const LeafEffort& effort, const Reduced& problem, Node& node)
      : frozen_(frozen),
        effort_(effort),
        problem_(problem),
        node_(node),
        steered_(problem),
        sweep_(steered_),
        pace_(node.inherited == nullptr, node.inherited != nullptr, 0.0),
        evaluator_(*frozen.root, problem, range_of(frozen, node)) {
    const double log_rss = frozen.root->log_rss(node.response, frozen.threshold, 0);
    unit_ = kUnit_rel * std::exp(std::clamp(log_rss, std::log(kExactFit_rel), 0.0));
    n_picks_ = frozen.scope->most_terms - std::min(frozen.scope->most_terms, problem.fixed_terms);
    if (n_picks_ >= problem.open.size())
      for (OpenPredictor& predictor : steered_.open) predictor.must = true;
  }

  Refined run() {
    if (effort_.superset) return superset();
    if (!begin()) return {};
    const std::size_t most = pace_.root() ? effort_.root_sweeps : effort_.node_sweeps;
    for (std::size_t pass = 0;; ++pass) {
      const Narrowed narrowed = evaluate();
      if (narrowed.cut) return {Standing::cut, {}};
      if (narrowed.n_struck > 0) return leave(Standing::changed);
      if (frozen_.expired && frozen_.expired()) return leave(Standing::expired);
      if (pass >= most || pace_.finished()) break;
      const double mu = pace_.barrier() * unit_ / static_cast<double>(problem_.m.rows());
      const BlockSweep::Outcome outcome = sweep_(point_.v, point_.lambda, mu, point_.d, z_);
      if (outcome == BlockSweep::Outcome::stuck) break;
      // children must not inherit the badly conditioned D
      if (outcome == BlockSweep::Outcome::reconditioned) {
        best_lower_ = -kInfinity;
        pace_.forget();
      }
    }
    return leave(Standing::open);
  }

 private:
  /// The RSS with every form that is left, as near as a tiny D brings it.
  Refined superset() {
    constexpr double kTiny = 1e-7;
    point_.d = kTiny * Eigen::MatrixXd(problem_.m.diagonal().cwiseMax(kTiny).asDiagonal());
    if (!z_.certify(problem_, point_.d)) return {};
    point_.v = z_.solve(problem_.b);
    const Narrowed narrowed = narrow_by(evaluator_(dual_value(problem_, z_, point_.d, point_.v), frozen_.threshold));
    return {narrowed.cut ? Standing::cut : Standing::open, {}};
  }

  bool begin() {
    if (node_.inherited) {
      point_ = unpack(*node_.inherited, problem_);
      point_.lambda = std::max(point_.lambda, unit_);
      if (shrink_until_certified(problem_, point_.d, z_)) return true;
    }
    point_.lambda = unit_;
    point_.v.setZero(problem_.b.size());
    return first_blocks(problem_, point_.d) && z_.certify(problem_, point_.d);
  }

  Narrowed evaluate() {
    coordinate_descent(steered_, z_.z(), point_.d, point_.lambda, pace_.descent(), point_.v);
    const DualValue value = dual_value(problem_, z_, point_.d, point_.v);
    set_price(value.gains);
    return narrow_by(evaluator_(value, frozen_.threshold));
  }

  Narrowed narrow_by(Bound bound) {
    Account account{0.0, nullptr};
    const Narrowed narrowed = narrow(frozen_, problem_, bound, point_.d, point_.v, node_, account);
    pace_.note(bound.lower, frozen_.threshold);
    if (best_.action.empty() || bound.lower >= best_lower_) {
      best_lower_ = bound.lower;
      best_point_ = point_;
      best_ = std::move(bound);
    }
    return narrowed;
  }

  /// Half way between the gains of the last predictor that may be picked and the next.
  void set_price(const Gains& gains) {
    if (n_picks_ >= problem_.open.size() || n_picks_ == 0) return;
    std::vector<double> largest;
    for (const std::vector<double>& of_forms : gains)
      largest.push_back(*std::max_element(of_forms.begin(), of_forms.end()));
    std::sort(largest.begin(), largest.end(), std::greater<>());
    point_.lambda = std::max(unit_, 0.5 * (largest[n_picks_ - 1] + largest[n_picks_]));
  }

  Refined leave(Standing standing) {
    const DualPoint& point = standing == Standing::open ? best_point_ : point_;
    node_.inherited = std::make_shared<const Inherited>(pack(problem_, point, point.v));
    return {standing, std::move(best_)};
  }

  const Frozen& frozen_;
  const LeafEffort& effort_;
  const Reduced& problem_;
  Node& node_;
  Reduced steered_;  ///< the problem as v and D are steered
  BlockSweep sweep_;
  SweepPace pace_;
  BoundEvaluator evaluator_;
  CertifiedDifference z_;
  DualPoint point_, best_point_;
  Bound best_;
  double unit_ = 0.0;
  std::size_t n_picks_ = 0;  ///< open predictors that a candidate may still have
  double best_lower_ = -kInfinity;
};

}  // namespace

Refined refine_by_rss(const Frozen& frozen, const LeafEffort& effort, const Reduced& problem, Node& node) {
  return RssBound(frozen, effort, problem, node).run();
}

}  // namespace formsieve::proof

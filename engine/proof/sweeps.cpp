#include "proof/block_sweep.hpp"
#include "proof/coordinate_descent.hpp"
#include "proof/refinement.hpp"
#include "proof/starting_point.hpp"

#include <algorithm>
#include <cmath>

namespace formsieve::proof {

namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();
/// The barrier's weight μ in units of λ over the number of columns: large first at a root, then small.
constexpr double kFirstBarrier = 1.0;
constexpr double kLastBarrier = 0.1;
constexpr double kBarrierStep = 0.3;
/// A pass that closes less than this share of the gap that remains counts as idle; so many idle ones end it.
constexpr double kSmallGain_root = 0.01;
constexpr double kSmallGain_node = 0.03;
constexpr std::size_t kMostIdle = 2;
constexpr double kSmallestGap = 0.05;  ///< of a score
constexpr std::size_t kRootDescent = 200;
constexpr std::size_t kNodeDescent = 60;

class Sweeps {
 public:
  Sweeps(const Frozen& frozen, const Reduced& problem, Node& node, Account& account)
      : frozen_(frozen),
        problem_(problem),
        node_(node),
        account_(account),
        price_(frozen, node.response),
        sweep_(problem) {}

  Refined run() {
    Refined refined;
    if (!begin()) return refined;
    const std::size_t most = root_ ? frozen_.effort.root_sweeps : frozen_.effort.node_sweeps;
    for (std::size_t pass = 0;; ++pass) {
      const Narrowed narrowed = evaluate(refined.bound);
      if (narrowed.cut) return {Standing::cut, {}};
      if (narrowed.n_struck > 0) return leave(Standing::changed, refined);
      if (frozen_.expired && frozen_.expired()) return leave(Standing::expired, refined);
      if (pass >= most || finished()) break;
      if (!sweep()) break;
    }
    return leave(Standing::open, refined);
  }

 private:
  bool begin() {
    root_ = node_.depth == 0;
    barrier_ = root_ && !node_.inherited ? kFirstBarrier : kLastBarrier;
    return starting_point(frozen_, problem_, node_, price_, point_, z_, account_.work);
  }

  Narrowed evaluate(Bound& best) {
    const std::size_t sweeps =
        coordinate_descent(problem_, z_.z(), point_.d, point_.lambda, root_ ? kRootDescent : kNodeDescent, point_.v);
    const auto order = static_cast<double>(problem_.m.rows());
    account_.work += 2.0 * static_cast<double>(sweeps + 1) * order * order;
    const BoundEvaluator evaluator(*frozen_.root, problem_, range_of(frozen_, node_));
    Bound bound = evaluator(dual_value(problem_, z_, point_.d, point_.v), frozen_.threshold);
    const Narrowed narrowed = narrow(frozen_, problem_, bound, point_.d, point_.v, node_, account_);
    note_gain(bound.lower);
    if (best.action.empty() || bound.lower >= best_lower_) {
      best_lower_ = bound.lower;
      best_point_ = point_;
      best = std::move(bound);
    }
    return narrowed;
  }

  void note_gain(double lower) {
    const double gap = std::max(frozen_.threshold - reference_, kSmallestGap);
    const double share = root_ ? kSmallGain_root : kSmallGain_node;
    const bool gained = !std::isfinite(reference_) || (std::isfinite(gap) && lower > reference_ + share * gap);
    idle_ = gained ? 0 : idle_ + 1;
    if (gained) reference_ = lower;
  }

  bool finished() {
    if (root_ && idle_ >= kMostIdle && barrier_ > kLastBarrier * 1.01) {
      barrier_ = std::max(kLastBarrier, barrier_ * kBarrierStep);
      idle_ = 0;
    }
    return idle_ >= kMostIdle;
  }

  bool sweep() {
    const auto order = static_cast<double>(problem_.m.rows());
    account_.work += 4.0 * order * order * order;
    const double mu = barrier_ * point_.lambda / order;
    const BlockSweep::Outcome outcome = sweep_(point_.v, point_.lambda, mu, point_.d, z_);
    if (outcome == BlockSweep::Outcome::reconditioned) {
      // children must not inherit the badly conditioned D, though its bound may be better for now
      best_lower_ = reference_ = -kInfinity;
      idle_ = 0;
    }
    return outcome != BlockSweep::Outcome::stuck;
  }

  Refined leave(Standing standing, Refined& refined) {
    // a smaller problem goes on from where the passes stand, children from the best
    const DualPoint& point = standing == Standing::open ? best_point_ : point_;
    node_.inherited = std::make_shared<const Inherited>(pack(problem_, point, point.v));
    node_.new_range = false;
    return {standing, std::move(refined.bound)};
  }

  const Frozen& frozen_;
  const Reduced& problem_;
  Node& node_;
  Account& account_;
  ColumnPrice price_;
  BlockSweep sweep_;
  CertifiedDifference z_;
  DualPoint point_, best_point_;
  bool root_ = false;
  double barrier_ = kLastBarrier;
  double best_lower_ = -kInfinity, reference_ = -kInfinity;
  std::size_t idle_ = 0;
};

}  // namespace

Refined refine_by_sweeps(const Frozen& frozen, const Reduced& problem, Node& node, Account& account) {
  return Sweeps(frozen, problem, node, account).run();
}

}  // namespace formsieve::proof

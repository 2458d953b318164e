#include "proof/block_sweep.hpp"
#include "proof/coordinate_descent.hpp"
#include "proof/pace.hpp"
#include "proof/refinement.hpp"
#include "proof/starting_point.hpp"

#include <algorithm>
#include <cmath>

namespace formsieve::proof {

namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();
constexpr double kSmallestGap = 0.05;  ///< of a score

class Sweeps {
 public:
  Sweeps(const Frozen& frozen, const Reduced& problem, Node& node, Account& account)
      : frozen_(frozen),
        problem_(problem),
        node_(node),
        account_(account),
        price_(frozen, node.response),
        sweep_(problem),
        pace_(node.depth == 0, node.inherited != nullptr, kSmallestGap) {}

  Refined run() {
    Refined refined;
    if (!begin()) return refined;
    const std::size_t most = pace_.root() ? frozen_.effort.root_sweeps : frozen_.effort.node_sweeps;
    for (std::size_t pass = 0;; ++pass) {
      const Narrowed narrowed = evaluate(refined.bound);
      if (narrowed.cut) return {Standing::cut, {}};
      if (narrowed.n_struck > 0) return leave(Standing::changed, refined);
      if (frozen_.expired && frozen_.expired()) return leave(Standing::expired, refined);
      if (pass >= most || pace_.finished()) break;
      if (!sweep()) break;
    }
    return leave(Standing::open, refined);
  }

 private:
  bool begin() { return starting_point(frozen_, problem_, node_, price_, point_, z_, account_.work); }

  Narrowed evaluate(Bound& best) {
    const std::size_t sweeps = coordinate_descent(problem_, z_.z(), point_.d, point_.lambda, pace_.descent(), point_.v);
    const auto order = static_cast<double>(problem_.m.rows());
    account_.work += 2.0 * static_cast<double>(sweeps + 1) * order * order;
    const BoundEvaluator evaluator(*frozen_.root, problem_, range_of(frozen_, node_));
    Bound bound = evaluator(dual_value(problem_, z_, point_.d, point_.v), frozen_.threshold);
    const Narrowed narrowed = narrow(frozen_, problem_, bound, point_.d, point_.v, node_, account_);
    pace_.note(bound.lower, frozen_.threshold);
    if (best.action.empty() || bound.lower >= best_lower_) {
      best_lower_ = bound.lower;
      best_point_ = point_;
      best = std::move(bound);
    }
    return narrowed;
  }

  bool sweep() {
    const auto order = static_cast<double>(problem_.m.rows());
    account_.work += 4.0 * order * order * order;
    const double mu = pace_.barrier() * point_.lambda / order;
    const BlockSweep::Outcome outcome = sweep_(point_.v, point_.lambda, mu, point_.d, z_);
    if (outcome == BlockSweep::Outcome::reconditioned) {
      // children must not inherit the badly conditioned D, though its bound may be better for now
      best_lower_ = -kInfinity;
      pace_.forget();
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
  SweepPace pace_;
  CertifiedDifference z_;
  DualPoint point_, best_point_;
  double best_lower_ = -kInfinity;
};

}  // namespace

Refined refine_by_sweeps(const Frozen& frozen, const Reduced& problem, Node& node, Account& account) {
  return Sweeps(frozen, problem, node, account).run();
}

}  // namespace formsieve::proof

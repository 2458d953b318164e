#include "proof/coordinate_descent.hpp"
#include "proof/first_blocks.hpp"
#include "proof/newton.hpp"
#include "proof/pace.hpp"
#include "proof/refinement.hpp"
#include "proof/starting_point.hpp"

#include <algorithm>
#include <bit>
#include <cmath>
#include <optional>

namespace formsieve::proof {

namespace {

/// μ in units of λ over the number of columns: at a root, after the range of columns was cut, and the last; and the
/// factor between.
constexpr double kFirstBarrier = 1000.0;
constexpr double kRangeBarrier = 1.0;
constexpr double kLastBarrier = 0.3;
constexpr double kBarrierStep = 0.3;
/// Where the range of columns is split next, the parts go on from this many times the last μ: the last steps would be
/// taken for a price of columns that no part keeps.
constexpr double kBarrierOfSplit = 30.0;
/// μ falls once a step with a smaller decrement was this long, or after so many steps.
constexpr double kNearCentre = 6.0;
constexpr double kLongStep = 0.4;
constexpr int kMostSteps_root = 80;
constexpr int kMostSteps_range = 40;
constexpr int kMostSteps_node = 12;
/// At the last μ, steps with a smaller decrement gain nothing more.
constexpr double kCentred = 0.5;
/// Evaluations of the bound with that many steps between.
constexpr std::size_t kPasses_root = 60;
constexpr std::size_t kPasses_node = 8;
constexpr int kSteps_root = 3;
constexpr int kSteps_node = 1;
constexpr double kSmallGain = 0.03;
constexpr double kSmallestGap = 0.05;  ///< of a score
/// The problem is built anew, smaller, once more than this share of the actions was struck off.
constexpr double kRebuild_at_once = 0.15;
constexpr double kRebuild_at_once_root = 0.07;  ///< its steps are the dearest, and many
constexpr double kRebuild_at_end = 0.05;

class NewtonRefinement {
 public:
  NewtonRefinement(const Frozen& frozen, const Reduced& problem, Node& node, Account& account)
      : frozen_(frozen), problem_(problem), node_(node), account_(account), price_(frozen, node.response) {}

  Refined run() {
    if (!begin()) return {};
    for (std::size_t pass = 0;; ++pass) {
      if (evaluate()) return {Standing::cut, {}};
      if (struck_share() > (root_ ? kRebuild_at_once_root : kRebuild_at_once)) return leave(Standing::changed);
      if (frozen_.expired && frozen_.expired()) return leave(Standing::expired);
      const bool last_barrier = point_.mu <= last_barrier_ * 1.001;
      if (pass >= (thorough_ ? kPasses_root : kPasses_node) || (idleness_.enough() && last_barrier)) break;
      if (!steps()) break;
    }
    const bool rebuild = struck_share() > kRebuild_at_end || (n_struck_ > 0 && problem_.open.size() <= 3);
    return leave(rebuild ? Standing::changed : Standing::open);
  }

 private:
  bool begin() {
    root_ = node_.depth == 0;
    thorough_ = root_ || node_.new_range;
    if (!starting_point(frozen_, problem_, node_, price_, point_, z_, account_.work)) return false;
    const double unit = point_.lambda / static_cast<double>(problem_.m.rows());
    last_barrier_ = kLastBarrier * unit;
    if (thorough_ && price_.worth_splitting(node_.fewest_columns, node_.most_columns)) last_barrier_ *= kBarrierOfSplit;
    polished_ = point_.v;
    if (point_.g.size() == 0) {
      if (recondition(problem_, point_.d)) z_.certify(problem_, point_.d);
      point_.g = problem_.b - z_.z() * point_.v;
      point_.mu = kFirstBarrier * unit;
    } else {
      // v itself is not inherited: that of forms with a tiny d would be far off
      point_.v = z_.solve(problem_.b - point_.g);
      if (node_.new_range) point_.mu = std::max(point_.mu, kRangeBarrier * unit);
    }
    point_.mu = std::max(point_.mu, last_barrier_);
    for (const OpenPredictor& predictor : problem_.open)
      n_actions_ += predictor.forms.size() + (predictor.must ? 0 : 1);
    return true;
  }

  double struck_share() const { return static_cast<double>(n_struck_) / static_cast<double>(n_actions_); }

  /// The better of Newton's v and of coordinate descent from where that ended last. True: the node is cut.
  bool evaluate() {
    const auto order = static_cast<double>(problem_.m.rows());
    const std::size_t sweeps =
        coordinate_descent(problem_, z_.z(), point_.d, point_.lambda, root_ ? kRootDescent : kNodeDescent, polished_);
    account_.work += order * order * (order / 3.0 + 2.0 * static_cast<double>(sweeps + 2));
    const BoundEvaluator evaluator(*frozen_.root, problem_, range_of(frozen_, node_));
    const DualValue direct = dual_value(problem_, z_, point_.d, point_.v);
    const DualValue polished = dual_value(problem_, z_, point_.d, polished_);
    const bool better =
        evaluator.lower(polished, frozen_.threshold).lower >= evaluator.lower(direct, frozen_.threshold).lower;
    Bound bound = evaluator(better ? polished : direct, frozen_.threshold);
    const std::size_t fewest = node_.fewest_columns;
    const std::size_t most = node_.most_columns;
    const Narrowed narrowed =
        narrow(frozen_, problem_, bound, point_.d, better ? polished_ : point_.v, node_, account_);
    if (narrowed.cut) return true;
    n_struck_ += narrowed.n_struck;
    if (node_.fewest_columns != fewest || node_.most_columns != most) newton_.reset();
    idleness_.note(bound.lower, frozen_.threshold);
    if (best_.action.empty() || bound.lower >= best_.lower) best_ = std::move(bound);
    return false;
  }

  /// False: the method can do no more here.
  bool steps() {
    if (!newton_) {
      point_.lambda = price_.within(point_.lambda, node_.fewest_columns, node_.most_columns);
      newton_.emplace(problem_,
                      ColumnRange{node_.fewest_columns, node_.most_columns, price_.tau(node_.fewest_columns),
                                  price_.tau(node_.most_columns)},
                      point_);
    }
    const int most_steps = root_ ? kMostSteps_root : thorough_ ? kMostSteps_range : kMostSteps_node;
    const int n_steps = thorough_ ? kSteps_root : kSteps_node;
    for (int i = 0; i < n_steps; ++i) {
      newton_->set_mu(point_.mu);
      const Newton::Step step = newton_->step();
      count_step();
      if (!step.usable) return false;
      ++steps_at_mu_;
      const bool centred = step.decrement < kNearCentre && step.length > kLongStep;
      if (!centred && steps_at_mu_ < most_steps) continue;
      if (point_.mu > last_barrier_ * 1.001) {
        point_.mu = std::max(last_barrier_, point_.mu * kBarrierStep);
        steps_at_mu_ = 0;
      } else if (step.decrement < kCentred) {
        break;
      }
    }
    return take();
  }

  void count_step() {
    const auto order = static_cast<double>(problem_.m.rows());
    constexpr double kFactorisations = 20.0;  // with the products of conjugate gradients
    account_.work += kFactorisations * order * order * order / 3.0;
  }

  /// Newton's point, if its M − D can be certified.
  bool take() {
    const double mu = point_.mu;
    DualPoint next = newton_->point();
    if (next.v.size() == 0 || !z_.certify(problem_, next.d)) {
      z_.certify(problem_, point_.d);
      return false;
    }
    point_ = std::move(next);
    point_.mu = mu;
    return true;
  }

  Refined leave(Standing standing) {
    node_.inherited = std::make_shared<const Inherited>(pack(problem_, point_, polished_));
    node_.new_range = false;
    return {standing, std::move(best_)};
  }

  const Frozen& frozen_;
  const Reduced& problem_;
  Node& node_;
  Account& account_;
  ColumnPrice price_;
  CertifiedDifference z_;
  DualPoint point_;
  Eigen::VectorXd polished_;
  std::optional<Newton> newton_;
  Bound best_;
  bool root_ = false, thorough_ = false;
  double last_barrier_ = 0.0;
  Idleness idleness_{kSmallGain, kSmallestGap};
  std::size_t n_actions_ = 0, n_struck_ = 0;
  int steps_at_mu_ = 0;
};

}  // namespace

Refined refine_by_newton(const Frozen& frozen, const Reduced& problem, Node& node, Account& account) {
  return NewtonRefinement(frozen, problem, node, account).run();
}

}  // namespace formsieve::proof

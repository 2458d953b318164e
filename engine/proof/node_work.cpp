#include "proof/node_work.hpp"

#include "proof/branching.hpp"
#include "proof/column_price.hpp"
#include "proof/refinement.hpp"
#include "proof/settle.hpp"

#include <algorithm>
#include <cmath>

namespace formsieve::proof {

namespace {

/// The range of columns is split into at most so many parts.
constexpr std::size_t kMostParts = 8;
/// How fast an action's weight falls with its bound's distance from the node's, in units of the gap: the predictor
/// branched on has the smallest sum of weights. So slow that the number of actions counts most (proof_bench: at 4 hard
/// spaces take up to twice the nodes).
constexpr double kBranchDecay = 0.5;

/// The candidate of the actions with the lowest bounds.
search::Choice round_off(const Reduced& problem, const Bound& bound) {
  search::Choice choice{problem.response, problem.fixed};
  for (std::size_t j = 0; j < problem.open.size(); ++j) {
    const std::vector<double>& action = bound.action[j];
    const auto best = static_cast<std::size_t>(std::min_element(action.begin(), action.end()) - action.begin());
    if (best == problem.open[j].forms.size()) continue;
    choice.choice[problem.open[j].predictor] = static_cast<std::uint16_t>(problem.open[j].forms[best].form + 1);
  }
  return choice;
}

/// Parts of a node by number of columns; empty when a split is not worth while.
std::vector<Node> split_columns(const Frozen& frozen, const Node& node) {
  const std::size_t width = node.most_columns - node.fewest_columns;
  const ColumnPrice price(frozen, node.response);
  if (!price.worth_splitting(node.fewest_columns, node.most_columns)) return {};
  const double wanted = std::ceil(std::sqrt(price.loss(node.fewest_columns, node.most_columns) / kLossOfSplit));
  const std::size_t parts =
      std::min({static_cast<std::size_t>(std::clamp(wanted, 2.0, double{kMostParts})), width + 1});
  std::vector<Node> children;
  std::size_t first = node.fewest_columns;
  for (std::size_t i = 0; i < parts; ++i) {
    Node child = node;
    child.fewest_columns = first;
    child.most_columns = node.fewest_columns + (width + 1) * (i + 1) / parts - 1;
    child.new_range = true;
    ++child.depth;
    first = child.most_columns + 1;
    children.push_back(std::move(child));
  }
  return children;
}

/// The open predictor to branch on: few actions that stay far below the threshold.
std::size_t branching_predictor(const Frozen& frozen, const Reduced& problem, const Node& node, const Bound& bound) {
  double gap = frozen.threshold - node.lower;
  if (!std::isfinite(gap)) gap = 1.0;
  gap = std::max(gap, 1e-6);
  std::size_t chosen = 0;
  double smallest = std::numeric_limits<double>::infinity();
  for (std::size_t j = 0; j < problem.open.size(); ++j) {
    double sum = 0.0;
    for (std::size_t a = 0; a < bound.action[j].size(); ++a)
      if ((node.actions[problem.open[j].predictor] & bit_of(problem.open[j], a)) != 0 &&
          std::isfinite(bound.action[j][a]))
        sum += std::exp(-kBranchDecay * (bound.action[j][a] - node.lower) / gap);
    if (sum >= smallest) continue;
    smallest = sum;
    chosen = j;
  }
  return chosen;
}

std::vector<Node> branch(const Frozen& frozen, const Reduced& problem, const Node& node, const Bound& bound) {
  const bool bounded = !bound.action.empty();
  if (bounded)
    if (std::vector<Node> parts = split_columns(frozen, node); !parts.empty()) return parts;
  const std::size_t j = bounded ? branching_predictor(frozen, problem, node, bound) : strongest_predictor(problem);
  return children_of(problem, node, j, bound);
}

/// The steps that the numbers of columns and terms, or pivots, decide, recorded as those of bounds are.
class Worker {
 public:
  Worker(const Frozen& frozen, Node node) : frozen_(frozen), node_(std::move(node)) {
    if (!frozen.record) return;
    result_.record = Certificate::Node{part_of(node_), {}, Certificate::End::nothing_left, {}};
    account_.steps = &result_.record->steps;
  }

  NodeResult run() {
    while (count()) {
      const Reduced problem = reduce(*frozen_.root, node_.response, node_.actions);
      const auto order = static_cast<double>(problem.m.rows());
      account_.work += order * order * static_cast<double>(problem.fixed_columns + 1);
      if (!separable(problem)) break;
      if (drop_inseparable(problem)) continue;
      if (small(problem)) {
        enumerate_all(problem);
        break;
      }
      const Refined refined = frozen_.newton ? refine_by_newton(frozen_, problem, node_, account_)
                                             : refine_by_sweeps(frozen_, problem, node_, account_);
      if (refined.standing == Standing::cut) break;
      if (!refined.bound.action.empty()) result_.rounded.push_back(round_off(problem, refined.bound));
      if (refined.standing == Standing::changed) continue;
      leave(problem, refined);
      break;
    }
    result_.work = account_.work;
    return std::move(result_);
  }

 private:
  void note(Certificate::Reason reason, Certificate::Part before, bool nothing_left) {
    if (account_.steps != nullptr)
      account_.steps->push_back({reason, std::move(before), part_of(node_), nothing_left, {}, {}, {}});
  }

  /// False: nothing is left.
  bool count() {
    Certificate::Part before = part_of(node_);
    const bool any = settle(*frozen_.root, *frozen_.scope, node_);
    note(Certificate::Reason::counting, std::move(before), !any);
    return any;
  }

  bool separable(const Reduced& problem) {
    if (!problem.separable) note(Certificate::Reason::inseparable, part_of(node_), true);
    return problem.separable;
  }

  /// True when a form went.
  bool drop_inseparable(const Reduced& problem) {
    Certificate::Part before = part_of(node_);
    bool dropped = false;
    for (const OpenPredictor& predictor : problem.open) {
      for (const OpenForm& form : predictor.forms) {
        if (form.separable) continue;
        node_.actions[predictor.predictor] &= ~(Actions{2} << form.form);
        dropped = true;
      }
    }
    if (dropped) note(Certificate::Reason::inseparable, std::move(before), false);
    return dropped;
  }

  bool small(const Reduced& problem) const {
    const std::uint64_t most = std::max<std::uint64_t>(frozen_.effort.enumerate_at, 1);
    return count_candidates(problem, most) <= most;
  }

  void enumerate_all(const Reduced& problem) {
    const auto order = static_cast<double>(problem.m.rows());
    const std::uint64_t met =
        enumerate(*frozen_.root, problem, range_of(frozen_, node_), frozen_.threshold, result_.found);
    account_.work += order * order * static_cast<double>(met);
    end(Certificate::End::enumerated);
  }

  void leave(const Reduced& problem, const Refined& refined) {
    if (refined.standing == Standing::expired) {
      end(Certificate::End::open);
      result_.unfinished = std::move(node_);
      return;
    }
    end(Certificate::End::branched);
    result_.children = branch(frozen_, problem, node_, refined.bound);
    if (node_.depth > 0) return;
    node_.inherited.reset();
    result_.root = std::move(node_);
  }

  void end(Certificate::End end) {
    if (result_.record) result_.record->end = end;
  }

  const Frozen& frozen_;
  Node node_;
  NodeResult result_;
  Account account_{0.0, nullptr};
};

}  // namespace

NodeResult work_on(const Frozen& frozen, Node node) {
  if (node.lower > frozen.threshold + kTolerance) return {};
  return Worker(frozen, std::move(node)).run();
}

}  // namespace formsieve::proof

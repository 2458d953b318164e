#include "certificate_checker.hpp"

#include "certificate_bound.hpp"

#include <algorithm>
#include <bit>
#include <cmath>
#include <limits>
#include <map>
#include <set>
#include <vector>

namespace formsieve::test {

namespace {

using proof::Certificate;
using Part = Certificate::Part;

constexpr Real kInfinity = std::numeric_limits<Real>::infinity();

class Checker {
 public:
  Checker(const proof::Problem& problem, const proof::Restriction& restriction, const Certificate& certificate,
          const proof::Proof& result, std::size_t keep, double within, double tolerance)
      : plain_(problem),
        restriction_(restriction),
        certificate_(certificate),
        result_(result),
        keep_(keep),
        within_(within),
        tolerance_(tolerance) {
    const std::size_t n_predictors = problem.space->predictors.size();
    terms_.fewest = restriction.fewest_terms;
    terms_.most = std::min(restriction.most_terms, problem.space->max_terms.value_or(n_predictors));
  }

  std::string run() {
    check_list();
    for (const Certificate::Node& node : certificate_.nodes)
      if (!nodes_.emplace(node.part.number, &node).second) return "a node twice";
    check_roots();
    for (const Part& root : certificate_.roots) check_part(root);
    return fault_;
  }

 private:
  void blame(const std::string& fault) {
    if (fault_.empty()) fault_ = fault;
  }

  const search::PredictorChoices& predictor(std::size_t j) const { return plain_.predictor(j); }

  // ---- the list

  void check_list() {
    if (!result_.proved) blame("not proved");
    if (result_.best.size() > keep_) blame("a list too long");
    threshold_ = kInfinity;
    if (!result_.best.empty()) threshold_ = result_.best.front().score + Real{within_};
    if (result_.best.size() == keep_ && keep_ > 0) threshold_ = std::min<Real>(threshold_, result_.best.back().score);
    for (const proof::Listed& listed : result_.best) {
      if (!(std::abs(plain_.score_of(listed.choice.response, listed.choice.choice) - listed.score) < tolerance_))
        blame("a listed score is wrong");
      if (listed.score > threshold_) blame("a listed score is beyond the threshold");
      if (!listed_.emplace(listed.choice.response, listed.choice.choice).second) blame("a candidate listed twice");
    }
  }

  // ---- the tree

  void check_roots() {
    std::set<std::size_t> responses;
    for (const Part& root : certificate_.roots) {
      responses.insert(root.response);
      for (std::size_t j = 0; j < root.actions.size(); ++j)
        for (std::size_t c = predictor(j).always ? 1 : 0; c <= predictor(j).forms.size(); ++c)
          if (!restricted(j, c) && !has(root.actions[j], c)) blame("a root leaves out an action");
      if (root.actions.size() != plain_.given().space->predictors.size()) blame("a root of another size");
      if (root.fewest_columns > 0) blame("a root leaves out numbers of columns");
      for (std::size_t k = root.most_columns + 1; k < plain_.given().penalty.size(); ++k)
        if (std::isfinite(plain_.given().penalty[k])) blame("a root leaves out numbers of columns");
    }
    for (std::size_t r = 0; r < plain_.given().space->n_responses; ++r)
      if (r == restriction_.response.value_or(r) && !responses.contains(r)) blame("a response form without a root");
  }

  bool restricted(std::size_t j, std::size_t choice) const {
    for (const auto& [predictor, actions] : restriction_.actions)
      if (predictor == j && !has(actions, choice)) return true;
    return false;
  }

  void check_part(const Part& part) {
    const auto found = nodes_.find(part.number);
    if (found == nodes_.end()) {
      if (!cut_by_ancestor(part)) blame("a child that was not worked on is not cut by a bound");
      return;
    }
    const Certificate::Node& node = *found->second;
    if (!same(node.part, part)) blame("a node is not the child it should be");
    const std::size_t depth = steps_.size();
    Part at = node.part;
    bool nothing_left = false;
    for (const Certificate::Step& step : node.steps) {
      if (nothing_left) blame("a step after the last");
      if (!same(step.before, at)) blame("a step begins elsewhere than the last ended");
      check_step(step);
      if (step.reason == Certificate::Reason::bound) steps_.push_back(&step);
      at = step.after;
      nothing_left = step.nothing_left;
    }
    check_end(node, at, nothing_left);
    steps_.resize(depth);
  }

  void check_end(const Certificate::Node& node, const Part& at, bool nothing_left) {
    switch (node.end) {
      case Certificate::End::nothing_left:
        if (!nothing_left) blame("something is left");
        return;
      case Certificate::End::enumerated:
        enumerate(at);
        return;
      case Certificate::End::branched:
        if (!covered(at, node.children)) blame("the children do not cover their parent");
        for (const Part& child : node.children) check_part(child);
        return;
      case Certificate::End::open:
        blame("an open node");
    }
  }

  static bool same(const Part& a, const Part& b) {
    return a.response == b.response && a.actions == b.actions && a.fewest_columns == b.fewest_columns &&
           a.most_columns == b.most_columns;
  }

  /// Either every child has all actions and their ranges make up the parent's, or every child has all of the range and
  /// they differ in one predictor, whose actions make up the parent's.
  static bool covered(const Part& parent, const std::vector<Part>& children) {
    std::set<std::size_t> columns;
    std::set<std::size_t> differing;
    proof::Actions together = 0;
    for (const Part& child : children) {
      if (child.response != parent.response || child.actions.size() != parent.actions.size()) return false;
      for (std::size_t k = child.fewest_columns; k <= child.most_columns; ++k) columns.insert(k);
      for (std::size_t j = 0; j < parent.actions.size(); ++j)
        if (child.actions[j] != parent.actions[j]) differing.insert(j);
    }
    if (differing.size() > 1 || children.empty()) return false;
    if (differing.empty()) {
      for (std::size_t k = parent.fewest_columns; k <= parent.most_columns; ++k)
        if (!columns.contains(k)) return false;
      return true;
    }
    for (const Part& child : children) {
      if (child.fewest_columns > parent.fewest_columns || child.most_columns < parent.most_columns) return false;
      together |= child.actions[*differing.begin()];
    }
    return (parent.actions[*differing.begin()] & ~together) == 0;
  }

  void enumerate(const Part& part) {
    std::vector<std::uint16_t> choice(part.actions.size(), 0);
    enumerate_from(part, 0, 0, 0, choice);
  }

  void enumerate_from(const Part& part, std::size_t j, std::size_t terms, std::size_t columns,
                      std::vector<std::uint16_t>& choice) {
    if (j == choice.size()) {
      if (terms < terms_.fewest || terms > terms_.most) return;
      if (columns < part.fewest_columns || columns > part.most_columns) return;
      const Real score = plain_.score_of(part.response, choice);
      if (score < threshold_ - tolerance_ && !listed_.contains({part.response, choice}))
        blame("an enumerated candidate below the threshold is not listed");
      return;
    }
    for (std::size_t c = 0; c <= predictor(j).forms.size(); ++c) {
      if (!has(part.actions[j], c)) continue;
      choice[j] = static_cast<std::uint16_t>(c);
      enumerate_from(part, j + 1, terms + (c > 0 ? 1 : 0), columns + plain_.width(j, c), choice);
    }
    choice[j] = 0;
  }

  // ---- steps

  void check_step(const Certificate::Step& step) {
    for (std::size_t j = 0; j < step.before.actions.size(); ++j)
      if ((step.after.actions[j] & ~step.before.actions[j]) != 0) blame("a step adds an action");
    switch (step.reason) {
      case Certificate::Reason::counting:
        check_counting(step);
        return;
      case Certificate::Reason::inseparable:
        check_inseparable(step);
        return;
      case Certificate::Reason::bound:
        check_bound(step);
    }
  }

  /// Calls visit(part) for every part of `before` that the step takes away besides numbers of columns: `before` with
  /// one predictor left one removed action and the range after.
  template <class VisitPart>
  void for_removed(const Certificate::Step& step, const VisitPart& visit) {
    for (std::size_t j = 0; j < step.before.actions.size(); ++j)
      for (std::size_t c = 0; c <= predictor(j).forms.size(); ++c) {
        if (!has(step.before.actions[j], c) || has(step.after.actions[j], c)) continue;
        Part part = step.before;
        part.actions[j] = proof::Actions{1} << c;
        part.fewest_columns = step.after.fewest_columns;
        part.most_columns = step.after.most_columns;
        visit(part);
      }
  }

  /// Numbers of columns of `before` that `after` does not have.
  static std::vector<Part> removed_columns(const Certificate::Step& step) {
    std::vector<Part> parts;
    for (std::size_t k = step.before.fewest_columns; k <= step.before.most_columns; ++k) {
      if (k >= step.after.fewest_columns && k <= step.after.most_columns) continue;
      parts.push_back(step.before);
      parts.back().fewest_columns = parts.back().most_columns = k;
    }
    return parts;
  }

  static bool empty_after(const Certificate::Step& step) {
    return std::find(step.after.actions.begin(), step.after.actions.end(), proof::Actions{0}) !=
               step.after.actions.end() ||
           step.after.fewest_columns > step.after.most_columns;
  }

  /// reachable[t][k]: some choice of the part's actions has t terms and k columns.
  bool possible(const Part& part) const {
    std::set<std::pair<std::size_t, std::size_t>> reachable{{0, 0}};
    for (std::size_t j = 0; j < part.actions.size(); ++j) {
      std::set<std::pair<std::size_t, std::size_t>> next;
      for (const auto& [t, k] : reachable)
        for (std::size_t c = 0; c <= predictor(j).forms.size(); ++c)
          if (has(part.actions[j], c)) next.emplace(t + (c > 0 ? 1 : 0), k + plain_.width(j, c));
      reachable = std::move(next);
    }
    return std::any_of(reachable.begin(), reachable.end(), [&](const auto& at) {
      return at.first >= terms_.fewest && at.first <= terms_.most && at.second >= part.fewest_columns &&
             at.second <= part.most_columns;
    });
  }

  /// The step may take its actions away one after another, so that what is removed is judged within what was left; any
  /// candidate of a removed part is a candidate of the part before.
  void check_counting(const Certificate::Step& step) {
    const auto check = [&](const Part& part) {
      if (possible(part)) blame("counting takes away what is possible");
    };
    for (const Part& part : removed_columns(step)) check(part);
    for_removed(step, check);
    if (step.nothing_left && !empty_after(step) && possible(step.before)) blame("counting leaves something");
  }

  void check_inseparable(const Certificate::Step& step) {
    const auto check = [&](const Part& part) {
      std::vector<std::uint16_t> fixed;
      for (const proof::Actions actions : part.actions)
        fixed.push_back(std::has_single_bit(actions) ? static_cast<std::uint16_t>(std::countr_zero(actions)) : 0);
      if (plain_.score_of(part.response, fixed) != kInfinity) blame("a form called inseparable is separable");
    };
    if (!removed_columns(step).empty()) blame("pivots take away numbers of columns");
    for_removed(step, check);
    if (step.nothing_left) check(step.before);
  }

  void check_bound(const Certificate::Step& step) {
    const PlainBound bound = evaluate(plain_, step);
    if (!bound.fault.empty()) return blame(bound.fault);
    const auto check = [&](const Part& part) {
      if (!above(plain_, bound, part, terms_, threshold_)) blame("a bound is not above the threshold");
    };
    for (const Part& part : removed_columns(step)) check(part);
    for_removed(step, check);
    if (step.nothing_left && !empty_after(step)) check(step.before);
  }

  bool cut_by_ancestor(const Part& part) {
    if (!possible(part)) return true;
    return std::any_of(steps_.rbegin(), steps_.rend(), [&](const Certificate::Step* step) {
      if (step->before.response != part.response) return false;
      const PlainBound bound = evaluate(plain_, *step);
      return bound.fault.empty() && above(plain_, bound, part, terms_, threshold_);
    });
  }

  PlainProblem plain_;
  const proof::Restriction& restriction_;
  const Certificate& certificate_;
  const proof::Proof& result_;
  std::size_t keep_;
  double within_, tolerance_;
  TermRange terms_;
  Real threshold_ = 0.0;
  std::set<std::pair<std::size_t, std::vector<std::uint16_t>>> listed_;
  std::map<std::uint64_t, const Certificate::Node*> nodes_;
  std::vector<const Certificate::Step*> steps_;  ///< bounds of the ancestors, and of the node so far
  std::string fault_;
};

}  // namespace

std::string fault_of(const proof::Problem& problem, const proof::Restriction& restriction,
                     const proof::Certificate& certificate, const proof::Proof& result, std::size_t keep, double within,
                     double tolerance) {
  return Checker(problem, restriction, certificate, result, keep, within, tolerance).run();
}

}  // namespace formsieve::test

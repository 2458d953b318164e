#include "superset_bound.hpp"

#include "stopwatch.hpp"

#include "proof/enumerate.hpp"
#include "proof/reduced.hpp"
#include "proof/scope.hpp"

#include <Eigen/Cholesky>

#include <algorithm>
#include <bit>
#include <limits>
#include <queue>
#include <vector>

namespace formsieve::bench {

namespace {

using proof::Actions;

constexpr double kInfinity = std::numeric_limits<double>::infinity();
constexpr std::uint64_t kEnumerated = 400;  // as the proof does

struct Node {
  double lower = -kInfinity;
  std::vector<Actions> actions;
  bool operator<(const Node& other) const { return lower > other.lower; }
};

/// RSS_rel of all open columns, and what each predictor's actions would at least add to it.
struct Fit {
  double rss = 0.0;
  std::vector<std::vector<double>> added;  ///< [open predictor][forms …, absence]
};

/// What dropping some columns adds: their coefficients by the inverse of their block of the inverse.
double drop_cost(const Eigen::MatrixXd& inverse, const Eigen::VectorXd& beta, const std::vector<Eigen::Index>& out) {
  if (out.empty()) return 0.0;
  const Eigen::VectorXd own = beta(out);
  return own.dot(Eigen::MatrixXd(inverse(out, out)).llt().solve(own));
}

Fit fit_all(const proof::Reduced& problem) {
  const Eigen::LLT<Eigen::MatrixXd> factor(problem.m);
  Fit fit;
  fit.added.resize(problem.open.size());
  if (factor.info() != Eigen::Success) {  // more columns than rows: nothing is known
    for (std::size_t j = 0; j < problem.open.size(); ++j) fit.added[j].assign(problem.open[j].forms.size() + 1, 0.0);
    return fit;
  }
  const Eigen::MatrixXd inverse = factor.solve(Eigen::MatrixXd::Identity(problem.m.rows(), problem.m.cols()));
  const Eigen::VectorXd beta = inverse * problem.b;
  fit.rss = std::max(0.0, problem.yy - problem.b.dot(beta));
  for (std::size_t j = 0; j < problem.open.size(); ++j) {
    const auto& forms = problem.open[j].forms;
    for (std::size_t kept = 0; kept <= forms.size(); ++kept) {
      std::vector<Eigen::Index> out;
      for (std::size_t f = 0; f < forms.size(); ++f)
        for (Eigen::Index c = 0; f != kept && c < forms[f].n_columns; ++c) out.push_back(forms[f].first + c);
      fit.added[j].push_back(drop_cost(inverse, beta, out));
    }
  }
  return fit;
}

class Search {
 public:
  Search(const proof::RootGram& root, Superset bound, double threshold)
      : root_(root), bound_(bound), threshold_(threshold), scope_(proof::scope_of(root, {})) {}

  SupersetProof run(double seconds) {
    const auto expired = after_seconds(seconds);
    open_.push({-kInfinity, root_.all_actions()});
    while (!open_.empty()) {
      if (expired()) break;
      Node node = open_.top();
      open_.pop();
      ++result_.nodes;
      work_on(std::move(node));
    }
    result_.proved = open_.empty();
    result_.n_listed = found_.size();
    if (!open_.empty()) result_.gap = threshold_ - open_.top().lower;
    return result_;
  }

 private:
  void work_on(Node node) {
    for (bool struck = true; struck;) {
      const proof::Reduced problem = proof::reduce(root_, 0, node.actions);
      if (!problem.separable) return;
      if (proof::count_candidates(problem, kEnumerated) <= kEnumerated) {
        proof::enumerate(root_, problem, {0, scope_.most_columns, 0, scope_.most_terms}, threshold_, found_);
        return;
      }
      const Fit fit = fit_all(problem);
      if (!raise(problem, fit, node)) return;
      struck = strike(problem, fit, node);
      if (std::find(node.actions.begin(), node.actions.end(), Actions{0}) != node.actions.end()) return;
      if (!struck) branch(problem, fit, node);
    }
  }

  double score(const proof::Reduced& problem, double rss, std::size_t more) const {
    std::size_t fewest = problem.fixed_columns + more;
    for (const proof::OpenPredictor& predictor : problem.open) fewest += predictor.must ? 1 : 0;
    return root_.score(0, rss, fewest);
  }

  double action_bound(const proof::Reduced& problem, const Fit& fit, std::size_t j, std::size_t a) const {
    const bool in = a < problem.open[j].forms.size() && !problem.open[j].must;
    return score(problem, fit.rss + (bound_ == Superset::plain ? 0.0 : fit.added[j][a]), in ? 1 : 0);
  }

  /// False: the node is cut.
  bool raise(const proof::Reduced& problem, const Fit& fit, Node& node) const {
    node.lower = std::max(node.lower, score(problem, fit.rss, 0));
    for (std::size_t j = 0; j < problem.open.size() && bound_ != Superset::plain; ++j) {
      double least = kInfinity;
      for (std::size_t a = 0; a < problem.open[j].forms.size() + (problem.open[j].must ? 0 : 1); ++a)
        least = std::min(least, action_bound(problem, fit, j, a));
      node.lower = std::max(node.lower, least);
    }
    return node.lower <= threshold_ + proof::kTolerance;
  }

  bool strike(const proof::Reduced& problem, const Fit& fit, Node& node) const {
    bool struck = false;
    for (std::size_t j = 0; j < problem.open.size(); ++j) {
      Actions& actions = node.actions[problem.open[j].predictor];
      for (std::size_t a = 0; a <= problem.open[j].forms.size(); ++a) {
        const Actions bit = a == problem.open[j].forms.size() ? 1 : Actions{2} << problem.open[j].forms[a].form;
        if ((actions & bit) == 0 || action_bound(problem, fit, j, a) <= threshold_ + proof::kTolerance) continue;
        actions &= ~bit;
        struck = true;
      }
    }
    return struck;
  }

  /// On the predictor that would be missed most.
  void branch(const proof::Reduced& problem, const Fit& fit, const Node& node) {
    std::size_t chosen = 0;
    for (std::size_t j = 1; j < problem.open.size(); ++j)
      if (fit.added[j].back() > fit.added[chosen].back()) chosen = j;
    Actions left = node.actions[problem.open[chosen].predictor];
    for (; left != 0; left &= left - 1) {
      Node child = node;
      child.actions[problem.open[chosen].predictor] = Actions{1} << std::countr_zero(left);
      open_.push(std::move(child));
    }
  }

  const proof::RootGram& root_;
  Superset bound_;
  double threshold_;
  proof::Scope scope_;
  std::priority_queue<Node> open_;
  std::vector<proof::Found> found_;
  SupersetProof result_;
};

}  // namespace

SupersetProof prove_by_superset(const proof::RootGram& root, Superset bound, double threshold, double seconds) {
  return Search(root, bound, threshold).run(seconds);
}

}  // namespace formsieve::bench

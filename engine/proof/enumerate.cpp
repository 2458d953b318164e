#include "proof/enumerate.hpp"

#include <Eigen/Core>

#include <limits>

namespace formsieve::proof {

namespace {

constexpr double kUnitRoundoff = std::numeric_limits<double>::epsilon() / 2;
/// Where the product of the pivots is below this, the score is not gone by.
constexpr double kSmallestProduct = 1e-7;

class Enumeration {
 public:
  Enumeration(const RootGram& root, const Reduced& problem, const CountRange& range, double threshold,
              std::vector<Found>& found)
      : root_(root), problem_(problem), range_(range), threshold_(threshold), found_(found), scorer_(root) {
    choice_ = {problem.response, problem.fixed};
  }

  /// What is left after the choices made so far: M and b of the columns of the predictors from `level` on.
  struct Rest {
    const Eigen::MatrixXd& m;
    const Eigen::VectorXd& b;
    double yy;
    std::size_t columns, terms;
    double pivots;  ///< their product
  };

  void visit(std::size_t level, const Rest& rest) {
    if (level == problem_.open.size()) {
      score(rest);
      return;
    }
    const OpenPredictor& predictor = problem_.open[level];
    const Eigen::Index tail = rest.b.size() - predictor.n_columns;
    if (!predictor.must) {
      choice_.choice[predictor.predictor] = 0;
      const Eigen::MatrixXd m = rest.m.bottomRightCorner(tail, tail);
      visit(level + 1, {m, rest.b.tail(tail), rest.yy, rest.columns, rest.terms, rest.pivots});
    }
    for (const OpenForm& form : predictor.forms) {
      choice_.choice[predictor.predictor] = static_cast<std::uint16_t>(form.form + 1);
      take(level, form, form.first - predictor.first, tail, rest);
    }
    choice_.choice[predictor.predictor] = 0;
  }

  std::uint64_t met() const { return met_; }

 private:
  void take(std::size_t level, const OpenForm& form, Eigen::Index at, Eigen::Index tail, const Rest& rest) {
    const Eigen::Index w = form.n_columns;
    Eigen::MatrixXd m(w + tail, w + tail);
    m.topLeftCorner(w, w) = rest.m.block(at, at, w, w);
    m.bottomLeftCorner(tail, w) = rest.m.block(rest.m.rows() - tail, at, tail, w);
    m.topRightCorner(w, tail) = m.bottomLeftCorner(tail, w).transpose();
    m.bottomRightCorner(tail, tail) = rest.m.bottomRightCorner(tail, tail);
    Eigen::VectorXd b(w + tail);
    b << rest.b.segment(at, w), rest.b.tail(tail);
    double yy = rest.yy;
    double pivots = rest.pivots;
    for (Eigen::Index c = 0; c < w; ++c) {
      const double pivot = m(c, c);
      pivots *= pivot;
      if (!(pivot > kSmallestProduct)) {
        pivots = 0.0;  // in doubt from here on
        continue;
      }
      const Eigen::Index n = w + tail - c - 1;
      const Eigen::VectorXd column = m.col(c).tail(n);
      m.bottomRightCorner(n, n).noalias() -= column * (column.transpose() / pivot);
      const double product = b(c);
      b.tail(n) -= column * (product / pivot);
      yy -= product * product / pivot;
    }
    const Eigen::MatrixXd left = m.bottomRightCorner(tail, tail);
    visit(level + 1, {left, b.tail(tail), yy, rest.columns + static_cast<std::size_t>(w), rest.terms + 1, pivots});
  }

  /// RSS_rel is off by at most e(1 + |c|₁)² for entries off by e and coefficients c, |c|² ≤ yy / λ_min(M_SS), and λ_min
  /// of a matrix with diagonal at most 1 is at least the product of its pivots.
  bool out(const Rest& rest) const {
    if (rest.pivots < kSmallestProduct) return false;
    const auto k = static_cast<double>(rest.columns - problem_.fixed_columns + 1);
    const double error = 4.0 * (problem_.entry_error + 16.0 * k * kUnitRoundoff) * (1.0 + k * k / rest.pivots);
    return root_.score(problem_.response, rest.yy - error, rest.columns) > threshold_;
  }

  void score(const Rest& rest) {
    if (rest.columns < range_.fewest_columns || rest.columns > range_.most_columns) return;
    if (rest.terms < range_.fewest_terms || rest.terms > range_.most_terms) return;
    ++met_;
    if (out(rest)) return;
    const CandidateScore score = scorer_(problem_.response, choice_.choice);
    if (score.score <= threshold_) found_.push_back({choice_, score});
  }

  const RootGram& root_;
  const Reduced& problem_;
  const CountRange& range_;
  double threshold_;
  std::vector<Found>& found_;
  CandidateScorer scorer_;
  search::Choice choice_;
  std::uint64_t met_ = 0;
};

}  // namespace

std::uint64_t count_candidates(const Reduced& problem, std::uint64_t most) {
  std::uint64_t count = 1;
  for (const OpenPredictor& predictor : problem.open) {
    count *= predictor.forms.size() + (predictor.must ? 0 : 1);
    if (count > most) return most + 1;
  }
  return count;
}

std::uint64_t enumerate(const RootGram& root, const Reduced& problem, const CountRange& range, double threshold,
                        std::vector<Found>& found) {
  Enumeration enumeration(root, problem, range, threshold, found);
  enumeration.visit(0, {problem.m, problem.b, problem.yy, problem.fixed_columns, problem.fixed_terms, 1.0});
  return enumeration.met();
}

}  // namespace formsieve::proof

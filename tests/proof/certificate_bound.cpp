#include "certificate_bound.hpp"

#include <algorithm>
#include <bit>
#include <cmath>
#include <limits>
#include <map>
#include <utility>

namespace formsieve::test {

namespace {

using RealVector = Eigen::Matrix<Real, Eigen::Dynamic, 1>;
using Part = proof::Certificate::Part;

constexpr Real kInfinity = std::numeric_limits<Real>::infinity();

/// Eliminates columns of `gram` one after another; false at a pivot of at most `smallest`.
bool eliminate(RealMatrix& gram, const std::vector<Eigen::Index>& columns, Real smallest) {
  for (const Eigen::Index c : columns) {
    const Real pivot = gram(c, c);
    if (!(pivot > smallest)) return false;
    const RealVector column = gram.col(c);
    gram -= column * column.transpose() / pivot;
  }
  return true;
}

bool positive_definite(RealMatrix a) {
  for (Eigen::Index c = 0; c < a.rows(); ++c) {
    if (!(a(c, c) > 0.0L)) return false;
    const Eigen::Index rest = a.rows() - c - 1;
    const RealVector column = a.col(c).tail(rest);
    a.bottomRightCorner(rest, rest) -= column * column.transpose() / a(c, c);
  }
  return true;
}

/// gᵀD⁻¹g by elimination.
Real gain_of(RealMatrix d, RealVector g) {
  Real sum = 0.0;
  for (Eigen::Index c = 0; c < g.size(); ++c) {
    sum += g(c) * g(c) / d(c, c);
    const Eigen::Index rest = g.size() - c - 1;
    const RealVector column = d.col(c).tail(rest);
    g.tail(rest) -= column * (g(c) / d(c, c));
    d.bottomRightCorner(rest, rest) -= column * column.transpose() / d(c, c);
  }
  return sum;
}

/// The open columns of a part, in plan order, and whose they are.
struct OpenColumns {
  std::vector<Eigen::Index> at;
  std::vector<std::size_t> owner;
};

OpenColumns open_columns(const PlainProblem& problem, const Part& part) {
  OpenColumns open;
  for (std::size_t j = 0; j < part.actions.size(); ++j) {
    if (std::has_single_bit(part.actions[j])) continue;
    for (std::size_t c = 1; c <= problem.predictor(j).forms.size(); ++c)
      for (std::size_t i = 0; has(part.actions[j], c) && i < problem.width(j, c); ++i) {
        open.at.push_back(static_cast<Eigen::Index>(problem.first_column(j, c) + i));
        open.owner.push_back(j);
      }
  }
  return open;
}

bool block_diagonal(const RealMatrix& d, const std::vector<std::size_t>& owner) {
  for (Eigen::Index a = 0; a < d.rows(); ++a)
    for (Eigen::Index b = 0; b < d.rows(); ++b)
      if (d(a, b) != d(b, a) ||
          (owner[static_cast<std::size_t>(a)] != owner[static_cast<std::size_t>(b)] && d(a, b) != 0))
        return false;
  return true;
}

PlainBound faulty(const std::string& fault) { return {fault, 0.0, {}}; }

/// The gains of all choices left, from D and g over the open columns in plan order; false where a block of D is not
/// positive definite.
bool add_gains(const PlainProblem& problem, const Part& part, const RealMatrix& d, const RealVector& g,
               PlainBound& bound) {
  Eigen::Index at = 0;
  for (std::size_t j = 0; j < part.actions.size(); ++j) {
    std::vector<GainOfChoice> choices;
    for (std::size_t c = 0; c <= problem.predictor(j).forms.size(); ++c) {
      if (!has(part.actions[j], c)) continue;
      const auto width = static_cast<Eigen::Index>(problem.width(j, c));
      GainOfChoice choice{c, c > 0 ? std::size_t{1} : 0, problem.width(j, c), 0.0L};
      if (!std::has_single_bit(part.actions[j]) && c > 0) {
        const RealMatrix own = d.block(at, at, width, width);
        if (!positive_definite(own)) return false;
        choice.gain = gain_of(own, g.segment(at, width));
        at += width;
      }
      choices.push_back(choice);
    }
    bound.choices.push_back(std::move(choices));
  }
  return true;
}

}  // namespace

PlainProblem::PlainProblem(const proof::Problem& problem) : problem_(problem) {
  const std::size_t n = problem.grams->order();
  gram_.resize(static_cast<Eigen::Index>(n), static_cast<Eigen::Index>(n));
  for (std::size_t i = 0; i < n; ++i)
    for (std::size_t j = 0; j < n; ++j) {
      const Real lengths =
          std::sqrt(Real{problem.grams->all[i * (n + 1)]}) * std::sqrt(Real{problem.grams->all[j * (n + 1)]});
      gram_(static_cast<Eigen::Index>(i), static_cast<Eigen::Index>(j)) =
          lengths > 0 ? problem.grams->all[i + j * n] / lengths : 0.0L;
    }
}

std::size_t PlainProblem::width(std::size_t j, std::size_t choice) const {
  return choice == 0 ? 0 : predictor(j).forms[choice - 1].n_columns;
}

std::size_t PlainProblem::first_column(std::size_t j, std::size_t choice) const {
  return predictor(j).forms[choice - 1].first_column;
}

Eigen::Index PlainProblem::response_column(std::size_t response) const {
  return static_cast<Eigen::Index>(problem_.grams->n_columns + response);
}

Real PlainProblem::score(std::size_t response, Real rss, std::size_t n_columns) const {
  if (n_columns >= problem_.penalty.size()) return kInfinity;
  const std::size_t y = problem_.grams->n_columns + response;
  const Real own = problem_.grams->all[y * (problem_.grams->order() + 1)];
  return static_cast<Real>(problem_.grams->n_rows) * (std::log(std::max(rss, 1e-12L)) + std::log(own)) +
         problem_.penalty[n_columns] + problem_.constant[response];
}

Real PlainProblem::score_of(std::size_t response, const std::vector<std::uint16_t>& choice) const {
  std::vector<Eigen::Index> own;
  for (std::size_t j = 0; j < choice.size(); ++j)
    for (std::size_t c = 0; c < width(j, choice[j]); ++c)
      own.push_back(static_cast<Eigen::Index>(first_column(j, choice[j]) + c));
  const std::size_t n_columns = own.size();
  std::vector<Eigen::Index> order(n_columns);
  for (std::size_t i = 0; i < n_columns; ++i) order[i] = static_cast<Eigen::Index>(i);
  own.push_back(response_column(response));
  RealMatrix gram = gram_(own, own);
  if (!eliminate(gram, order, 1e-8L)) return kInfinity;
  return score(response, gram(gram.rows() - 1, gram.cols() - 1), n_columns);
}

RealMatrix PlainProblem::projected(const Part& part) const {
  RealMatrix gram = gram_;
  for (std::size_t j = 0; j < part.actions.size(); ++j) {
    if (!std::has_single_bit(part.actions[j])) continue;
    const auto choice = static_cast<std::size_t>(std::countr_zero(part.actions[j]));
    for (std::size_t c = 0; c < width(j, choice); ++c)
      eliminate(gram, {static_cast<Eigen::Index>(first_column(j, choice) + c)}, 0.0L);
  }
  return gram;
}

PlainBound evaluate(const PlainProblem& problem, const proof::Certificate::Step& step) {
  if (step.problem.size() != step.before.actions.size()) return faulty("a bound of another problem");
  for (std::size_t j = 0; j < step.problem.size(); ++j)
    if ((step.before.actions[j] & ~step.problem[j]) != 0) return faulty("a bound of a problem without an action");
  Part part = step.before;
  part.actions = step.problem;
  const OpenColumns open = open_columns(problem, part);
  const auto q = static_cast<Eigen::Index>(open.at.size());
  if (step.d.rows() != q || step.d.cols() != q || step.v.size() != q) return faulty("a bound of another size");
  const RealMatrix gram = problem.projected(part);
  const Eigen::Index y = problem.response_column(part.response);
  const RealMatrix d = step.d.cast<Real>();
  const RealVector v = step.v.cast<Real>();
  if (!block_diagonal(d, open.owner)) return faulty("D is not block-diagonal");
  const RealMatrix z = RealMatrix(gram(open.at, open.at)) - d;
  if (!positive_definite(z)) return faulty("M − D is not positive definite");
  PlainBound bound{"", gram(y, y) - v.dot(z * v), {}};
  const RealVector g = RealVector(gram(open.at, y)) - z * v;
  if (!add_gains(problem, part, d, g, bound)) return faulty("a block of D is not positive definite");
  return bound;
}

bool above(const PlainProblem& problem, const PlainBound& bound, const Part& part, const TermRange& terms,
           Real threshold) {
  std::map<std::pair<std::size_t, std::size_t>, Real> sums{{{0, 0}, 0.0L}};  // the largest by terms and columns
  for (std::size_t j = 0; j < part.actions.size(); ++j) {
    std::map<std::pair<std::size_t, std::size_t>, Real> next;
    for (const auto& [at, sum] : sums)
      for (const GainOfChoice& choice : bound.choices[j]) {
        if (!has(part.actions[j], choice.choice)) continue;
        const auto [entry, added] =
            next.try_emplace({at.first + choice.terms, at.second + choice.columns}, sum + choice.gain);
        if (!added) entry->second = std::max(entry->second, sum + choice.gain);
      }
    sums = std::move(next);
  }
  for (const auto& [at, sum] : sums) {
    if (at.first < terms.fewest || at.first > terms.most) continue;
    if (at.second < part.fewest_columns || at.second > part.most_columns) continue;
    if (!(problem.score(part.response, bound.base - sum, at.second) > threshold)) return false;
  }
  return true;
}

}  // namespace formsieve::test

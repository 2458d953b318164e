#include "search/guided_descent.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <utility>

namespace formsieve::search {

namespace {
/// Draws of forms for predictors that are always in, when they are inseparable, before a start is given up.
constexpr int kMostDraws = 50;
}  // namespace

Descent::Descent(const DescentSetup& setup, Scout& scout, std::uint64_t seed)
    : setup_(setup), space_(setup.space), scout_(scout), random_(seed) {}

std::vector<Leg> Descent::run(std::size_t objective, const Choices& start) {
  std::vector<Leg> legs;
  Choices from = start;
  for (std::optional<std::size_t> next = objective; next && !stopped(); next = better_objective()) {
    objective_ = *next;
    path_.clear();
    Leg& leg = legs.emplace_back();
    leg.objective = objective_;
    if (!begin(from)) return legs;
    descend();
    leg.path = std::move(path_);
    leg.score = score_;
    leg.known = known_;
    if (known_)
      leg.ending = setup_.known[objective_].at(current_);
    else if (!stopped())
      leg.ending = current_;
    if (over()) return legs;
    from = current_;
  }
  return legs;
}

bool Descent::begin(const Choices& start) {
  Choices choices = start;
  if (!mend(choices)) return false;
  const double score = score_of(objective_, choices);
  scout_.meet(objective_, choices, score);
  arrive(std::move(choices), score);
  return true;
}

/// Takes predictors out of an inseparable candidate, and where none is left draws other forms of those always in.
bool Descent::mend(Choices& choices) {
  for (int draw = 0; draw < kMostDraws;) {
    if (std::isfinite(score_of(objective_, choices))) return true;
    std::vector<std::size_t> optional;
    for (std::size_t j = 0; j < choices.size(); ++j)
      if (choices[j] != 0 && !space_.always(j)) optional.push_back(j);
    if (!optional.empty()) {
      choices[optional[random_.below(optional.size())]] = 0;
      continue;
    }
    for (std::size_t j = 0; j < choices.size(); ++j)
      if (space_.always(j))
        choices[j] = static_cast<std::uint16_t>(1 + random_.below(space_.space().predictors[j].forms.size()));
    ++draw;
  }
  return false;
}

void Descent::descend() {
  while (!over()) {
    pass();
    if (!improve_by_one() && !improve_by_pair()) return;
  }
}

/// One go at every predictor present, and at what may enter.
void Descent::pass() {
  const std::size_t n = space_.n_predictors();
  std::vector<std::size_t> slots = {n};  // n: what may enter
  for (std::size_t j = 0; j < n; ++j)
    if (current_[j] != 0) slots.push_back(j);
  base::shuffle(std::span(slots), random_);
  for (const std::size_t slot : slots) {
    if (slot == n) {
      while (!over() && enter()) continue;
    } else if (!over() && current_[slot] != 0) {  // it may have been exchanged
      scout_.look_in_place(objective_, current_, slot);
      take_best();
    }
  }
}

bool Descent::enter() {
  scout_.look_for_more(objective_, current_);
  return take_best();
}

bool Descent::improve_by_one() {
  if (over()) return false;
  scout_.look_around(objective_, current_);
  return take_best();
}

/// The best of all pairs with one predictor, the first that brings anything.
bool Descent::improve_by_pair() {
  std::vector<std::size_t> present;
  for (std::size_t j = 0; j < current_.size(); ++j)
    if (current_[j] != 0) present.push_back(j);
  base::shuffle(std::span(present), random_);
  for (std::size_t i = 1; i < present.size(); ++i) {
    for (std::size_t j = 0; j < i && !over(); ++j)
      scout_.look_at_pair(objective_, current_, std::min(present[i], present[j]), std::max(present[i], present[j]));
    if (over()) return false;
    if (take_best()) return true;
  }
  return false;
}

/// Another objective under which the same choices are better.
std::optional<std::size_t> Descent::better_objective() {
  if (!setup_.comparable[objective_]) return std::nullopt;
  std::optional<std::size_t> best;
  double least = bar();
  for (std::size_t o = 0; o < setup_.objectives.size(); ++o) {
    if (!setup_.comparable[o] || o == objective_) continue;
    const double score = score_of(o, current_);
    scout_.meet(o, current_, score);
    if (!(score < least)) continue;
    least = score;
    best = o;
  }
  return best;
}

/// Makes the best change that the scout has met, if its canonical score is an improvement too.
bool Descent::take_best() {
  for (Found& move : scout_.take_moves(bar())) {
    const double score = score_of(objective_, move.choices);
    if (!(score < bar())) continue;
    arrive(std::move(move.choices), score);
    return true;
  }
  return false;
}

void Descent::arrive(Choices choices, double score) {
  current_ = std::move(choices);
  score_ = score;
  path_.push_back(current_);
  known_ = setup_.known[objective_].contains(current_);
}

}  // namespace formsieve::search

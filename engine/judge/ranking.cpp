#include "judge/judge.hpp"

#include "judge/picks.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numeric>

namespace formsieve::judge {

namespace {

void mark(std::vector<Candidate>& candidates, std::optional<std::size_t> index, const char* name) {
  if (index) candidates[*index].marks.emplace_back(name);
}

/// Candidates in the order of their criterion, ties by number.
std::vector<Candidate> sorted(std::vector<Candidate> candidates, Criterion criterion) {
  std::vector<double> value(candidates.size());
  std::transform(candidates.begin(), candidates.end(), value.begin(),
                 [&](const Candidate& candidate) { return criterion_value(candidate, criterion); });
  std::vector<std::size_t> order(candidates.size());
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) {
    return value[a] != value[b] ? value[a] < value[b] : number_below(candidates[a].number, candidates[b].number);
  });
  std::vector<Candidate> result;
  result.reserve(candidates.size());
  for (const std::size_t i : order) result.push_back(std::move(candidates[i]));
  return result;
}

}  // namespace

double criterion_value(const Candidate& candidate, Criterion criterion) {
  double value = std::numeric_limits<double>::quiet_NaN();
  switch (criterion) {
    case Criterion::cv_rmse:
      value = candidate.cv.rmse.value_or(value);
      break;
    case Criterion::aic:
      value = candidate.likelihood.aic;
      break;
    case Criterion::aicc:
      value = candidate.likelihood.aicc;
      break;
    case Criterion::bic:
      value = candidate.likelihood.bic;
      break;
  }
  return std::isnan(value) ? std::numeric_limits<double>::infinity() : value;
}

std::vector<std::string> rank(std::vector<Candidate>& candidates, Criterion criterion, double near_tie) {
  candidates = sorted(std::move(candidates), criterion);
  for (std::size_t i = 0; i < candidates.size(); ++i) {
    candidates[i].rank = i + 1;
    candidates[i].marks.clear();
  }
  const Picks picks = find_picks(candidates, criterion, near_tie);
  mark(candidates, picks.best, "best");
  mark(candidates, picks.recommended, "recommended");
  mark(candidates, picks.simplest, "simplest");
  mark(candidates, picks.lowest_aic, "lowest AIC");
  return remarks(candidates, picks, near_tie);
}

std::vector<Candidate> select(const std::vector<Candidate>& ranked, std::size_t n) {
  std::vector<Candidate> selected;
  for (std::size_t i = 0; i < ranked.size(); ++i)
    if (i < n || !ranked[i].marks.empty()) selected.push_back(ranked[i]);
  return selected;
}

}  // namespace formsieve::judge

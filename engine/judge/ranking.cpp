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

void put_in_order(std::vector<Candidate>& candidates, Criterion criterion) {
  candidates = sorted(std::move(candidates), criterion);
  for (std::size_t i = 0; i < candidates.size(); ++i) {
    candidates[i].rank = i + 1;
    candidates[i].marks.clear();
  }
}

std::vector<std::string> name_lines(std::vector<Candidate>& ranked, Criterion criterion, double near_tie,
                                    const Admits& admits) {
  const Picks picks = find_picks(ranked, criterion, near_tie, admits);
  mark(ranked, picks.best, "best");
  mark(ranked, picks.recommended, "recommended");
  mark(ranked, picks.simplest, "simplest");
  mark(ranked, picks.lowest_aic, "lowest AIC");
  return remarks(ranked, picks, near_tie);
}

std::vector<std::string> rank(std::vector<Candidate>& candidates, Criterion criterion, double near_tie) {
  put_in_order(candidates, criterion);
  return name_lines(candidates, criterion, near_tie, {});
}

}  // namespace formsieve::judge

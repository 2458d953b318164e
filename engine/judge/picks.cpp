#include "judge/picks.hpp"

#include <algorithm>
#include <limits>
#include <vector>

namespace formsieve::judge {

namespace {

std::string_view without_leading_zeros(std::string_view digits) {
  const auto first = digits.find_first_not_of('0');
  return first == std::string_view::npos ? std::string_view() : digits.substr(first);
}

double cv_or_infinity(const Candidate& candidate) { return criterion_value(candidate, Criterion::cv_rmse); }

double aic_of(const Candidate& candidate) { return criterion_value(candidate, Criterion::aic); }

/// Index of the first candidate in the order of `below` among those that `qualify` and are admitted.
template <class Qualifies, class Below>
std::optional<std::size_t> first_by(std::span<const Candidate> ranked, const Admits& admits, Qualifies qualifies,
                                    Below below) {
  std::vector<std::size_t> order;
  for (std::size_t i = 0; i < ranked.size(); ++i)
    if (qualifies(ranked[i])) order.push_back(i);
  std::stable_sort(order.begin(), order.end(),
                   [&](std::size_t a, std::size_t b) { return below(ranked[a], ranked[b]); });
  const auto found = std::find_if(order.begin(), order.end(), [&](std::size_t i) { return !admits || admits(i); });
  return found == order.end() ? std::nullopt : std::optional(*found);
}

bool below_by_cv(const Candidate& a, const Candidate& b) {
  if (cv_or_infinity(a) != cv_or_infinity(b)) return cv_or_infinity(a) < cv_or_infinity(b);
  return number_below(a.number, b.number);
}

bool below_by_aic(const Candidate& a, const Candidate& b) {
  return aic_of(a) != aic_of(b) ? aic_of(a) < aic_of(b) : below_by_cv(a, b);
}

bool below_by_size(const Candidate& a, const Candidate& b) {
  return n_coefficients(a) != n_coefficients(b) ? n_coefficients(a) < n_coefficients(b) : below_by_cv(a, b);
}

}  // namespace

bool number_below(std::string_view a, std::string_view b) {
  const auto left = without_leading_zeros(a);
  const auto right = without_leading_zeros(b);
  return left.size() != right.size() ? left.size() < right.size() : left < right;
}

std::size_t n_coefficients(const Candidate& candidate) {
  return candidate.likelihood.n_parameters > 0 ? candidate.likelihood.n_parameters - 1 : candidate.coefficients.size();
}

Picks find_picks(std::span<const Candidate> ranked, Criterion criterion, double near_tie, const Admits& admits) {
  constexpr double kNone = std::numeric_limits<double>::infinity();
  Picks picks;
  const auto by_rank = [](const Candidate&, const Candidate&) { return false; };
  picks.best = first_by(
      ranked, admits, [&](const Candidate& one) { return criterion_value(one, criterion) < kNone; }, by_rank);
  picks.lowest_aic = first_by(
      ranked, admits, [](const Candidate& one) { return aic_of(one) < kNone; }, below_by_aic);
  picks.lowest_cv = first_by(
      ranked, admits, [](const Candidate& one) { return one.cv.rmse.has_value(); }, below_by_cv);
  if (!picks.lowest_cv) return picks;

  const Candidate& lowest = ranked[*picks.lowest_cv];
  const double near = *lowest.cv.rmse * (1.0 + near_tie);
  const double within_error = *lowest.cv.rmse + lowest.cv.rmse_se.value_or(0.0);
  picks.recommended = first_by(
      ranked, admits, [&](const Candidate& one) { return cv_or_infinity(one) <= near; }, below_by_aic);
  picks.simplest = first_by(
      ranked, admits, [&](const Candidate& one) { return cv_or_infinity(one) <= within_error; }, below_by_size);
  return picks;
}

}  // namespace formsieve::judge

#include "plain_summary.hpp"

#include <algorithm>
#include <cmath>
#include <cstdint>
#include <limits>

namespace formsieve::test {

namespace {

using search::Standing;
using search::Summary;

/// ln Σ exp(logs), about the largest of them.
double log_of_sum(const std::vector<long double>& logs) {
  if (logs.empty()) return -std::numeric_limits<double>::infinity();
  const long double largest = *std::max_element(logs.begin(), logs.end());
  if (std::isinf(largest)) return static_cast<double>(largest);
  long double sum = 0.0L;
  for (const long double log : logs) sum += std::exp(log - largest);
  return static_cast<double>(largest + std::log(sum));
}

struct Penalised {
  const search::Scored* scored;
  double penalised_rss;
};

/// The standing of those candidates that `belongs` picks out.
template <class Belongs>
Standing standing(const std::vector<Penalised>& candidates, std::size_t n_rows, Belongs belongs) {
  Standing result;
  std::vector<long double> log_weights;
  for (const auto& [scored, penalised_rss] : candidates) {
    if (!belongs(*scored)) continue;
    result.best_cv_sse = std::min(result.best_cv_sse, scored->cv_sse);
    result.best_penalised_rss = std::min(result.best_penalised_rss, penalised_rss);
    log_weights.push_back(-0.5L * static_cast<long double>(n_rows) * std::log(static_cast<long double>(penalised_rss)));
  }
  result.log_weight = log_of_sum(log_weights);
  return result;
}

/// Lower edge of a bin: four equal steps to an octave, beginning at 2^−14.
double plain_edge(std::size_t bin) {
  return std::pow(2.0, static_cast<double>(bin / 4) - 14.0) * (1.0 + static_cast<double>(bin % 4) / 4.0);
}

std::size_t bin_of(double sse_in_units) {
  std::size_t bin = 0;
  while (bin + 1 < Summary::kBins && sse_in_units >= plain_edge(bin + 1)) ++bin;
  return bin;
}

std::size_t n_terms(const search::Scored& scored) {
  const auto& choice = scored.choice.choice;
  return choice.size() - static_cast<std::size_t>(std::count(choice.begin(), choice.end(), std::uint16_t{0}));
}

search::ResponseSummary of_response(const search::Space& space, const std::vector<Penalised>& candidates,
                                    std::size_t n_rows, double unit_sse) {
  search::ResponseSummary result;
  result.all = standing(candidates, n_rows, [](const search::Scored&) { return true; });
  for (std::size_t j = 0; j < space.predictors.size(); ++j) {
    auto& of_choice = result.of_choice.emplace_back();
    for (std::size_t c = 0; c <= space.predictors[j].forms.size(); ++c)
      of_choice.push_back(
          standing(candidates, n_rows, [&](const search::Scored& scored) { return scored.choice.choice[j] == c; }));
  }
  for (std::size_t terms = 0; terms <= space.predictors.size(); ++terms)
    result.by_terms.push_back(
        standing(candidates, n_rows, [&](const search::Scored& scored) { return n_terms(scored) == terms; }));
  result.histogram.assign(Summary::kBins, 0);
  for (const auto& candidate : candidates) ++result.histogram[bin_of(candidate.scored->cv_sse / unit_sse)];
  return result;
}

}  // namespace

std::vector<std::vector<search::Scored>> every_scored(const search::Space& space, const base::GramSet& grams) {
  search::WalkOptions options;
  options.threads = 1;
  options.rules = {{search::Score::cv_sse, search::count(space).convert_to<std::size_t>(), {}}};
  return search::walk(space, grams, options).lists.front();
}

Summary plain_summary(const search::Space& space, const base::GramSet& grams, const std::vector<double>& penalty) {
  const auto every = every_scored(space, grams);
  const auto n = static_cast<double>(grams.n_rows);
  Summary summary;
  for (std::size_t r = 0; r < every.size(); ++r) {
    std::vector<Penalised> candidates;
    for (const auto& scored : every[r]) {
      const double cost = penalty.at(scored.n_columns);
      candidates.push_back({&scored, std::isinf(cost) ? cost : scored.rss * std::exp(cost / n)});
    }
    double empty_sse = 0.0;
    const std::size_t own = (grams.n_columns + r) * (grams.order() + 1);
    for (const auto& validation : grams.validation) empty_sse += validation[own];
    const double octave = std::exp2(std::ceil(std::log2(empty_sse)));
    summary.unit_sse.push_back(octave * grams.response_scale[r] * grams.response_scale[r]);
    summary.responses.push_back(of_response(space, candidates, grams.n_rows, summary.unit_sse.back()));
  }
  return summary;
}

}  // namespace formsieve::test

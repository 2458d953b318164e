#include "search/guided_starts.hpp"

#include <algorithm>
#include <numeric>
#include <span>
#include <vector>

namespace formsieve::search {

namespace {

std::uint16_t random_form(const GuidedSpace& space, std::size_t predictor, base::SplitMix64& random) {
  return static_cast<std::uint16_t>(1 + random.below(space.space().predictors[predictor].forms.size()));
}

/// A random predictor for which `is` holds; n_predictors() when there is none.
template <class Is>
std::size_t random_predictor(const GuidedSpace& space, base::SplitMix64& random, const Is& is) {
  std::vector<std::size_t> among;
  for (std::size_t j = 0; j < space.n_predictors(); ++j)
    if (is(j)) among.push_back(j);
  return among.empty() ? space.n_predictors() : among[random.below(among.size())];
}

}  // namespace

base::SplitMix64 generator_of(std::uint64_t seed, std::uint64_t index) {
  // states drawn from two generators lie anywhere on the cycle, unlike neighbouring seeds, whose numbers overlap
  const std::uint64_t first = base::SplitMix64(seed).next();
  return base::SplitMix64(base::SplitMix64(first + index).next());
}

Choices random_start(const GuidedSpace& space, std::size_t most_terms, base::SplitMix64& random) {
  Choices choices(space.n_predictors(), 0);
  std::vector<std::size_t> optional;
  for (std::size_t j = 0; j < choices.size(); ++j) {
    if (space.always(j))
      choices[j] = random_form(space, j, random);
    else if (!space.space().predictors[j].forms.empty())
      optional.push_back(j);
  }
  const std::size_t most = std::min(most_terms, space.most_terms());
  const std::size_t room = std::min(most - std::min(most, space.n_always()), optional.size());
  const std::size_t n = random.below(room + 1);
  base::shuffle(std::span(optional), random);
  for (std::size_t i = 0; i < n; ++i) choices[optional[i]] = random_form(space, optional[i], random);
  return choices;
}

Choices shaken(const GuidedSpace& space, const Choices& candidate, base::SplitMix64& random) {
  enum Change : std::uint8_t { leave, enter, change, kChanges };
  Choices choices = candidate;
  const std::size_t n_changes = 2 + random.below(1 + n_terms(candidate) / 3);
  for (std::size_t i = 0; i < n_changes; ++i) {
    const auto what = static_cast<Change>(random.below(kChanges));
    const std::size_t j = random_predictor(space, random, [&](std::size_t p) {
      if (what == enter) return choices[p] == 0 && !space.space().predictors[p].forms.empty();
      return choices[p] != 0 && (what == change || !space.always(p));
    });
    if (j == space.n_predictors()) continue;
    if (what == enter && n_terms(choices) >= space.most_terms()) continue;
    choices[j] = what == leave ? std::uint16_t{0} : random_form(space, j, random);
  }
  return choices;
}

}  // namespace formsieve::search

#include "search/guided_tally.hpp"

#include <algorithm>
#include <utility>

namespace formsieve::search {

void Tally::record(std::span<const Leg> legs, bool independent) {
  for (const Leg& leg : legs) {
    if (!leg.known) endings_[leg.objective].try_emplace(*leg.ending, Ending{leg.score, 0});
    most_terms_ = std::max(most_terms_, n_terms(*leg.ending));
  }
  if (!independent) return;
  const Leg& first = legs.front();
  ++n_starts_[first.objective];
  ++endings_[first.objective].at(*first.ending).n_independent;
}

std::size_t Tally::n_ended(std::size_t objective, const Choices& choices) const {
  const auto found = endings_[objective].find(choices);
  return found == endings_[objective].end() ? 0 : found->second.n_independent;
}

std::vector<Choices> Tally::best_endings(std::size_t objective, std::size_t most) const {
  std::vector<std::pair<double, const Choices*>> all;
  for (const auto& [choices, ending] : endings_[objective]) all.emplace_back(ending.score, &choices);
  std::stable_sort(all.begin(), all.end(), [](const auto& a, const auto& b) { return a.first < b.first; });
  std::vector<Choices> best;
  for (std::size_t i = 0; i < std::min(most, all.size()); ++i) best.push_back(*all[i].second);
  return best;
}

}  // namespace formsieve::search

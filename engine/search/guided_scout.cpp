#include "search/guided_scout.hpp"

#include <algorithm>
#include <cmath>
#include <utility>

namespace formsieve::search {

Scout::Scout(const GuidedSpace& space, std::span<const Objective> objectives, std::size_t keep,
             std::span<const double> limit)
    : space_(space), objectives_(objectives), looks_(objectives.size()), pair_looks_(objectives.size()) {
  for (const double most : limit) collectors_.emplace_back(keep, most);
}

Look& Scout::look(std::size_t objective) {
  if (!looks_[objective]) looks_[objective] = std::make_unique<Look>(space_, objectives_[objective]);
  return *looks_[objective];
}

void Scout::look_in_place(std::size_t objective, const Choices& candidate, std::size_t predictor) {
  Choices base = candidate;
  base[predictor] = 0;
  consider(objective, look(objective).extend(base), predictor);
}

void Scout::look_for_more(std::size_t objective, const Choices& candidate) {
  if (n_terms(candidate) < space_.most_terms()) consider(objective, look(objective).extend(candidate), std::nullopt);
}

void Scout::look_around(std::size_t objective, const Choices& candidate) {
  const bool more = n_terms(candidate) < space_.most_terms();
  for (const Extensions& extensions : look(objective).around(candidate)) {
    std::optional<std::size_t> slot;
    for (std::size_t j = 0; j < candidate.size(); ++j)
      if (candidate[j] != extensions.base[j]) slot = j;
    if (slot || more) consider(objective, extensions, slot);
  }
}

/// `slot`: the predictor whose place is free, none where one more enters.
void Scout::consider(std::size_t objective, const Extensions& extensions, std::optional<std::size_t> slot) {
  const bool must = slot && space_.always(*slot);
  Choices base = extensions.base;
  const std::uint64_t hash = space_.hash(objectives_[objective].response(), base);
  if (slot && !must) consider(objective, extensions.base_score, hash, base, *slot, 0);
  const std::size_t first = must ? *slot : 0;
  const std::size_t last = must ? *slot + 1 : space_.n_predictors();
  for (std::size_t j = first; j < last; ++j) {
    if (base[j] != 0) continue;
    for (std::size_t g = space_.first_form(j); g < space_.first_form(j + 1); ++g) {
      const OpenForm& form = space_.forms()[g];
      consider(objective, extensions.with[g], hash ^ form.key, base, j, form.choice);
    }
  }
}

void Scout::consider(std::size_t objective, double score, std::uint64_t hash, Choices& base, std::size_t predictor,
                     std::uint16_t choice) {
  if (!std::isfinite(score)) return;
  distinct_.add(hash);
  Collector& collector = collectors_[objective];
  const bool kept = score < collector.limit();
  const bool move = moves_.size() < kMostMoves || score <= moves_.back().score;
  if (!kept && !move) return;
  const std::uint16_t before = std::exchange(base[predictor], choice);
  if (kept) collector.offer(score, hash, base);
  if (move) propose(score, base);
  base[predictor] = before;
}

void Scout::look_at_pair(std::size_t objective, const Choices& candidate, std::size_t first, std::size_t second) {
  if (!pair_looks_[objective]) pair_looks_[objective] = std::make_unique<PairLook>(space_, objectives_[objective]);
  Choices base = candidate;
  base[first] = base[second] = 0;
  const std::vector<double>& scores = pair_looks_[objective]->look(base, first, second);
  const std::size_t n_second = 1 + space_.space().predictors[second].forms.size();
  const std::uint64_t hash = space_.hash(objectives_[objective].response(), base);
  for (std::size_t i = 0; i < scores.size(); ++i) {
    const auto a = static_cast<std::uint16_t>(i / n_second);
    const auto b = static_cast<std::uint16_t>(i % n_second);
    if ((a == 0 && space_.always(first)) || (b == 0 && space_.always(second))) continue;
    base[first] = a;
    const std::uint64_t key = (a == 0 ? 0 : space_.form(first, a).key) ^ (b == 0 ? 0 : space_.form(second, b).key);
    consider(objective, scores[i], hash ^ key, base, second, b);
  }
}

void Scout::meet(std::size_t objective, const Choices& candidate, double score) {
  if (!std::isfinite(score)) return;
  const std::uint64_t hash = space_.hash(objectives_[objective].response(), candidate);
  distinct_.add(hash);
  collectors_[objective].offer(score, hash, candidate);
}

void Scout::rest() {
  for (auto& look : looks_) look.reset();
  for (auto& look : pair_looks_) look.reset();
}

void Scout::propose(double score, const Choices& choices) {
  Found move{score, choices};
  const auto at = std::lower_bound(moves_.begin(), moves_.end(), move, better);
  if (at != moves_.end() && at->choices == move.choices) return;
  moves_.insert(at, std::move(move));
  if (moves_.size() > kMostMoves) moves_.pop_back();
}

std::vector<Found> Scout::take_moves(double below) {
  std::erase_if(moves_, [&](const Found& move) { return !(move.score < below); });
  return std::exchange(moves_, {});
}

}  // namespace formsieve::search

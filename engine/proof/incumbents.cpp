#include "proof/incumbents.hpp"

#include <algorithm>
#include <array>
#include <bit>
#include <cmath>
#include <utility>

namespace formsieve::proof {

namespace {

/// The closure looks at the single changes of so many of the best: lists may be far longer.
constexpr std::size_t kClosedEntries = 300;
/// About a candidate met at a node; the list is closed again at the end of the first search anyway.
constexpr std::size_t kClosedAboutNode = 30;
/// All looks of the first closure together may take about so many operations, or a few of them what they take.
constexpr double kClosureWork = 2e10;
constexpr double kFewestLooks = 100;
constexpr double kMostLooks = 3000;
/// What a score by updates may be off.
constexpr double kScoreError = 1e-6;
/// A change that lowers a score by less is not followed: descents must end.
constexpr double kSmallestDescent = 1e-9;
/// Descents do not begin with all predictors in where there are more than these: each step would take long.
constexpr std::size_t kLargestStart = 120;
/// Candidates remembered as looked at or descended from.
constexpr std::size_t kMostRemembered = 200'000;

}  // namespace

Incumbents::Incumbents(const RootGram& root, const Scope& scope, Shortlist& list, std::function<bool()> expired)
    : root_(&root), scope_(&scope), list_(&list), expired_(std::move(expired)), scorer_(root), changes_(root, scope) {}

bool Incumbents::offer(const search::Choice& candidate) {
  return scope_->contains(candidate.response, candidate.choice) &&
         list_->offer(candidate, scorer_(candidate.response, candidate.choice));
}

void Incumbents::descend(search::Choice at) {
  double score = scorer_(at.response, at.choice).score;
  while (!expired_()) {
    if (descended_from_.size() > kMostRemembered) descended_from_.clear();
    if (!descended_from_.emplace(at.response, at.choice).second) break;
    std::pair<std::size_t, std::uint16_t> best{};
    bool better = false;
    changes_(at, [&](std::size_t predictor, std::uint16_t choice, double changed) {
      if (!(changed < score - kSmallestDescent)) return;
      score = changed;
      best = {predictor, choice};
      better = true;
    });
    if (!better) break;
    at.choice[best.first] = best.second;
  }
  offer(at);
}

void Incumbents::offer_changes(const search::Choice& from) {
  struct Change {
    double score;
    std::size_t predictor;
    std::uint16_t choice;
  };
  std::vector<Change> changes;
  changes_(from, [&](std::size_t predictor, std::uint16_t choice, double score) {
    if (score <= list_->threshold() + kScoreError) changes.push_back({score, predictor, choice});
  });
  // best first: the threshold falls, and fewer need a score of their own
  std::stable_sort(changes.begin(), changes.end(), [](const Change& a, const Change& b) { return a.score < b.score; });
  search::Choice changed = from;
  for (const Change& change : changes) {
    if (!(change.score <= list_->threshold() + kScoreError)) return;
    const std::uint16_t old = std::exchange(changed.choice[change.predictor], change.choice);
    offer(changed);
    changed.choice[change.predictor] = old;
  }
}

void Incumbents::close(std::size_t most_entries) {
  if (looked_at_.size() > kMostRemembered) looked_at_.clear();
  for (std::size_t looks = 0; looks < most_entries && !expired_();) {
    const std::vector<Listed> entries = list_->best(kClosedEntries);
    bool any = false;
    for (const Listed& entry : entries) {
      if (looks >= most_entries || expired_()) return;
      if (!looked_at_.emplace(entry.choice.response, entry.choice.choice).second) continue;
      any = true;
      ++looks;
      offer_changes(entry.choice);
    }
    if (!any) return;
  }
}

std::size_t Incumbents::affordable_looks() const {
  const Listed* best = list_->best();
  const double k = best == nullptr ? 1.0 : static_cast<double>(best->n_columns) + 1.0;
  const double work = 2.0 * k * k * static_cast<double>(root_->gram().rows() + 1);
  return static_cast<std::size_t>(std::clamp(kClosureWork / work, kFewestLooks, kMostLooks));
}

void Incumbents::start() {
  for (const std::size_t response : scope_->responses) {
    search::Choice smallest{response, {}};
    search::Choice large{response, {}};
    const auto& products = root_->products(response);
    for (std::size_t j = 0; j < scope_->actions.size(); ++j) {
      const Actions actions = scope_->actions[j];
      if (actions == 0) return;
      smallest.choice.push_back(static_cast<std::uint16_t>(std::countr_zero(actions)));
      std::uint16_t strongest = smallest.choice.back();
      double most = -1.0;
      for (std::size_t f = 0; f < root_->space().predictors[j].forms.size(); ++f) {
        if ((actions >> (f + 1) & 1) == 0) continue;
        const double product =
            std::abs(products(static_cast<Eigen::Index>(root_->space().predictors[j].forms[f].first_column)));
        if (product <= most) continue;
        most = product;
        strongest = static_cast<std::uint16_t>(f + 1);
      }
      large.choice.push_back(strongest);
    }
    for (std::size_t j = 0; j < large.choice.size() && search::n_terms(smallest.choice) < scope_->fewest_terms; ++j)
      smallest.choice[j] = large.choice[j];
    for (search::Choice& begin : std::array{smallest, large}) {
      offer(begin);
      const std::size_t terms = search::n_terms(begin.choice);
      if (terms <= scope_->most_terms && terms <= kLargestStart) descend(begin);
    }
  }
  close(affordable_looks());
}

void Incumbents::improve(const search::Choice& candidate, bool force) {
  if (!offer(candidate) && !force) return;
  descend(candidate);
  close(kClosedAboutNode);
}

}  // namespace formsieve::proof

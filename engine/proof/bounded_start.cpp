#include "proof/bounded_start.hpp"

#include "search/candidate_fit.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <map>

namespace formsieve::proof {

namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();

using Choices = std::vector<std::uint16_t>;

struct Change {
  std::size_t predictor = 0;
  std::uint16_t choice = 0;
  double cv_sse = 0.0;
};

class Neighbours {
 public:
  Neighbours(const search::Space& space, const base::GramSet& grams, std::size_t response)
      : space_(space), grams_(grams), response_(response) {}

  /// Every predictor that is always in with its first form, no other. Empty where max_terms has no room for them.
  Choices smallest() const {
    Choices choice;
    for (const search::PredictorChoices& predictor : space_.predictors) choice.push_back(predictor.always ? 1 : 0);
    return contains(choice) ? choice : Choices{};
  }

  bool contains(const Choices& choice) const {
    if (choice.size() != space_.predictors.size()) return false;
    std::size_t terms = 0;
    for (std::size_t j = 0; j < choice.size(); ++j) {
      if (choice[j] > space_.predictors[j].forms.size()) return false;
      if (choice[j] == 0 && space_.predictors[j].always) return false;
      if (choice[j] != 0) ++terms;
    }
    return terms <= space_.max_terms.value_or(choice.size());
  }

  double cv_sse(const Choices& choice) {
    search::columns_of(space_, choice, columns_);
    return search::cv_sse_of(grams_, columns_, response_, fit_);
  }

  /// Every candidate that differs in one predictor and can be separated, best first.
  std::vector<Change> changes(const Choices& from) {
    std::vector<Change> found;
    Choices choice = from;
    for (std::size_t j = 0; j < from.size(); ++j) {
      for (std::size_t c = 0; c <= space_.predictors[j].forms.size(); ++c) {
        choice[j] = static_cast<std::uint16_t>(c);
        if (choice[j] == from[j] || !contains(choice)) continue;
        if (const double score = cv_sse(choice); std::isfinite(score)) found.push_back({j, choice[j], score});
      }
      choice[j] = from[j];
    }
    std::stable_sort(found.begin(), found.end(), [](const Change& a, const Change& b) { return a.cv_sse < b.cv_sse; });
    return found;
  }

  /// Single changes as long as they are for the better.
  Choices descend(Choices from, const std::stop_token& stop) {
    double best = cv_sse(from);
    while (!stop.stop_requested()) {
      const std::vector<Change> found = changes(from);
      if (found.empty() || !(found.front().cv_sse < best)) break;
      from[found.front().predictor] = found.front().choice;
      best = found.front().cv_sse;
    }
    return from;
  }

  /// The candidate and what the cheapest changes combine to, at most so many.
  search::Subspace about(const Choices& centre, std::uint64_t most) {
    search::Subspace subspace{response_, {}};
    for (const std::uint16_t choice : centre) subspace.choices.push_back({choice});
    double size = 1.0;
    for (const Change& change : changes(centre)) {
      Choices& left = subspace.choices[change.predictor];
      const double larger = size / static_cast<double>(left.size()) * static_cast<double>(left.size() + 1);
      if (larger > static_cast<double>(most)) break;
      size = larger;
      left.insert(std::upper_bound(left.begin(), left.end(), change.choice), change.choice);
    }
    return subspace;
  }

 private:
  const search::Space& space_;
  const base::GramSet& grams_;
  std::size_t response_;
  search::CandidateFit fit_;
  std::vector<std::size_t> columns_;
};

/// Hints of the response, scored. Their RSS is found when the list is scored at the end.
std::vector<search::Held> scored_hints(Neighbours& neighbours, std::size_t response,
                                       std::span<const search::Choice> hints) {
  std::vector<search::Held> found;
  for (const search::Choice& hint : hints) {
    if (hint.response != response || !neighbours.contains(hint.choice)) continue;
    const double score = neighbours.cv_sse(hint.choice);
    if (std::isfinite(score)) found.push_back({hint.choice, score, 0.0, 0});
  }
  return found;
}

}  // namespace

void HeldList::add(std::vector<search::Held> found) {
  if (found.empty()) return;
  // stable: of two with the same choice the listed one comes first
  std::vector<search::Held> all = std::move(entries_);
  all.insert(all.end(), std::move_iterator(found.begin()), std::move_iterator(found.end()));
  std::stable_sort(all.begin(), all.end(),
                   [](const search::Held& a, const search::Held& b) { return a.choice < b.choice; });
  all.erase(std::unique(all.begin(), all.end(),
                        [](const search::Held& a, const search::Held& b) { return a.choice == b.choice; }),
            all.end());
  std::sort(all.begin(), all.end(), search::better_held);
  if (all.size() > capacity()) all.resize(capacity());
  entries_ = std::move(all);
}

double HeldList::worst() const { return entries_.size() < keep_ ? kInfinity : entries_[keep_ - 1].cv_sse; }

std::uint64_t start_list(const search::Space& space, const base::GramSet& grams, std::size_t response,
                         std::span<const search::Choice> hints, const StartEffort& effort, const std::stop_token& stop,
                         HeldList& list) {
  Neighbours neighbours(space, grams, response);
  list.add(scored_hints(neighbours, response, hints));
  Choices centre = list.entries().empty() ? neighbours.smallest() : list.entries().front().choice;
  if (centre.size() != space.predictors.size()) return 0;
  centre = neighbours.descend(std::move(centre), stop);
  std::uint64_t visited = 0;
  for (int i = 0; i < effort.most_neighbourhoods && !stop.stop_requested(); ++i) {
    search::SubspaceResult walked = search::walk_subspace(space, grams, neighbours.about(centre, effort.neighbourhood),
                                                          list.capacity(), kInfinity, stop);
    visited += walked.n_scored + walked.n_inseparable;
    list.add(std::move(walked.best));
    if (list.entries().empty() || list.entries().front().choice == centre) break;
    centre = list.entries().front().choice;
  }
  return visited;
}

}  // namespace formsieve::proof

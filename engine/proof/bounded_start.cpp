#include "proof/bounded_start.hpp"

#include "search/candidate_fit.hpp"
#include "search/descend.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

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

  double cv_sse(const Choices& choice) {
    search::columns_of(space_, choice, columns_);
    return search::cv_sse_of(grams_, columns_, response_, fit_);
  }

  /// The candidate and what the cheapest single changes combine to, at most so many.
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
  /// Those that can be separated, best first.
  std::vector<Change> changes(const Choices& from) {
    std::vector<Change> found;
    for (const Choices& choice : search::single_changes(space_, from)) {
      const auto j =
          static_cast<std::size_t>(std::mismatch(choice.begin(), choice.end(), from.begin()).first - choice.begin());
      if (const double score = cv_sse(choice); std::isfinite(score)) found.push_back({j, choice[j], score});
    }
    std::stable_sort(found.begin(), found.end(), [](const Change& a, const Change& b) { return a.cv_sse < b.cv_sse; });
    return found;
  }

  const search::Space& space_;
  const base::GramSet& grams_;
  std::size_t response_;
  search::CandidateFit fit_;
  std::vector<std::size_t> columns_;
};

/// Hints of the response, scored. Their RSS is found when the list is scored at the end.
std::vector<search::Held> scored_hints(Neighbours& neighbours, const search::Space& space, std::size_t response,
                                       std::span<const search::Choice> hints) {
  std::vector<search::Held> found;
  for (const search::Choice& hint : hints) {
    if (hint.response != response || !search::admits(space, hint.choice)) continue;
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
  list.add(scored_hints(neighbours, space, response, hints));
  search::DescentOptions descent;
  descent.keep = 1;
  descent.most_moves = std::numeric_limits<std::size_t>::max();
  descent.threads = 1;
  descent.stop = stop;
  if (!list.entries().empty()) descent.from = list.entries().front().choice;
  const auto ending = search::descend(space, grams, response, descent);
  if (ending.empty()) return 0;
  Choices centre = ending.front().choice;
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

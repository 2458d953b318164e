// The best candidates of one response form, with canonical figures, and which of them have been expanded.
#pragma once

#include "base/gram.hpp"
#include "search/guided.hpp"
#include "search/guided_collector.hpp"
#include "search/guided_space.hpp"

#include <array>
#include <cstddef>
#include <map>
#include <span>
#include <vector>

namespace formsieve::search {

/// Canonical figures of one candidate, infinite where it is inseparable.
struct Figures {
  double cv_sse = 0.0, rss = 0.0;  ///< form's scale
  double own_sse = 0.0;            ///< own units squared; that of cv_sse without own-units matrices
  std::size_t n_columns = 0;
};
Figures figures_of(const GuidedSpace& space, const base::GramSet& grams, std::size_t response, const Choices& choices);

class ResponseLists {
 public:
  enum class By { cv, own };

  explicit ResponseLists(std::size_t keep) : keep_(keep) {}

  bool holds(const Choices& choices) const { return entries_.contains(choices); }
  void add(const Choices& choices, const Figures& figures);
  /// Puts both lists in order and drops what is in neither. To be called after additions.
  void settle();

  /// What a candidate must not exceed to enter the list.
  double limit(By by) const;
  /// At most `most` of the first `leading` candidates of a list that have not been expanded.
  std::vector<Choices> unexpanded(By by, std::size_t leading, std::size_t most) const;
  void mark_expanded(By by, const Choices& choices);
  std::size_t n_unexpanded(By by, std::size_t leading) const;
  /// The list with the candidates' numbers; n_starts and n_found_best are left to the caller.
  GuidedList list(By by, const GuidedSpace& space, std::size_t response) const;

 private:
  struct Entry {
    Figures figures;
    std::array<bool, 2> expanded{};
    double score(By by) const { return by == By::cv ? figures.cv_sse : figures.own_sse; }
  };
  using Ranked = std::vector<std::map<Choices, Entry>::iterator>;
  Ranked& ranked(By by) { return ranked_[static_cast<std::size_t>(by)]; }
  const Ranked& ranked(By by) const { return ranked_[static_cast<std::size_t>(by)]; }

  std::size_t keep_;
  std::map<Choices, Entry> entries_;
  std::array<Ranked, 2> ranked_;
};

/// The best of several workers' finds, each once, in order; at most `keep`.
std::vector<Found> merged(std::span<const std::vector<Found>* const> finds, std::size_t keep);

}  // namespace formsieve::search

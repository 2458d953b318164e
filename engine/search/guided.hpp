// Guided local search: good candidates of a space that is too large to visit.
//
// Descents by changes of one or two predictors from many starts. A descent minimises the held-out SSE of one response
// form on its scale, or in own units to first order (base::GramSet::OwnUnits, the working response): the second is
// comparable across response forms, and such a descent ends where no other response form with the same choices is
// better either. Nothing is proved: how often independent starts end in the best candidate found says how sure one may
// be.
#pragma once

#include "base/gram.hpp"
#include "search/space.hpp"
#include "search/walk.hpp"

#include <cstddef>
#include <cstdint>
#include <functional>
#include <optional>
#include <stop_token>
#include <vector>

namespace formsieve::search {

/// How far a guided search has come.
struct GuidedProgress {
  std::size_t n_restarts = 0;    ///< done
  std::uint64_t n_scored = 0;    ///< distinct candidates, as in GuidedResult
  std::size_t n_unexpanded = 0;  ///< leading candidates whose neighbours have not been looked at
};

struct GuidedOptions {
  std::size_t keep = 2000;     ///< candidates of each list at most
  std::size_t restarts = 400;  ///< starts, shared by the objectives in turn; rounded up to whole rounds
  /// Leading candidates of each list whose every single change and exchange is looked at in the end: the more, the
  /// fewer of the best are missing from the list.
  std::size_t expand = 200;
  std::uint64_t seed = 1;
  unsigned threads = 0;  ///< 0: all that the process may use
  std::stop_token stop;  ///< looked at within descents
  /// Asked between rounds; true ends the search, whose result then depends on the number of rounds alone. A limit of
  /// time belongs here. May be empty.
  std::function<bool()> enough;
  std::function<void(const GuidedProgress&)> progress;  ///< between rounds, from the calling thread; may be empty
  std::vector<Choice> hints;                            ///< admissible candidates to start from
  /// Response forms whose scale is own units already, so that their held-out SSE is comparable with the own-units
  /// scores of others. Those without own_units in the Gram and not named here are compared with none.
  std::vector<std::size_t> own_scale;
};

/// The best candidates of one response form by one score.
struct GuidedList {
  std::vector<Scored> candidates;  ///< best first, ties by candidate number
  /// [candidates] what they are ordered by: cv_sse, or the working-response score in own units squared.
  std::vector<double> sse;
  std::size_t n_starts = 0;      ///< independent starts of descents by this score that came to an end
  std::size_t n_found_best = 0;  ///< of these, how many ended in the first candidate
  std::size_t n_expanded = 0;    ///< leading candidates without one that has neighbours not looked at
};

struct GuidedResult {
  std::vector<GuidedList> by_cv;   ///< [response]
  std::vector<GuidedList> by_own;  ///< [response]; empty without own_units, whose list, if any, is that by cv_sse
  /// Of the response forms that are comparable in own units, that of the best candidate by that score.
  std::optional<std::size_t> best_response;
  std::size_t n_restarts = 0;  ///< done, hints included
  std::uint64_t n_scored = 0;  ///< distinct candidates scored, estimated to about one in a hundred
  bool complete = true;        ///< all restarts and expansions were done: neither stopped nor enough
};

/// The same for any number of threads, unless stopped in the middle of a round. Listed figures are those of
/// search::cv_sse_of and search::own_scores; candidates that these find inseparable are never listed. Empty lists where
/// no candidate exists. Cost of a restart: some looks at all neighbours (guided_look.hpp), each about
/// O(folds · k² log k · columns) for candidates of k columns. Memory: a few rows of the Gram for each worker, and the
/// lists.
GuidedResult guided(const Space& space, const base::GramSet& grams, const GuidedOptions& options);

}  // namespace formsieve::search

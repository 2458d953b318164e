#include "search/descend.hpp"

#include "base/parallel.hpp"
#include "search/candidate_fit.hpp"

#include <algorithm>
#include <cmath>
#include <map>
#include <utility>

namespace formsieve::search {

namespace {

/// Candidates that one worker scores at a time.
constexpr std::size_t kGrain = 8;

/// The choices of one candidate; they compare as the candidates' numbers do.
using Choices = std::vector<std::uint16_t>;
/// Smaller score first, then smaller candidate number.
using Ranked = std::pair<double, Choices>;

/// Every candidate looked at, each scored once.
class Scores {
 public:
  Scores(const Space& space, const base::GramSet& grams, std::size_t response, unsigned threads)
      : space_(space), grams_(grams), response_(response), threads_(threads) {}

  /// The best of these candidates.
  Ranked best(const std::vector<Choices>& candidates) {
    std::vector<const Choices*> unseen;
    for (const Choices& candidate : candidates)
      if (!known_.contains(candidate)) unseen.push_back(&candidate);
    std::vector<double> scores(unseen.size());
    base::parallel_for((unseen.size() + kGrain - 1) / kGrain, threads_, [&](std::size_t part) {
      CandidateFit fit;
      std::vector<std::size_t> columns;
      const std::size_t last = std::min((part + 1) * kGrain, unseen.size());
      for (std::size_t i = part * kGrain; i < last; ++i) {
        columns_of(space_, *unseen[i], columns);
        scores[i] = cv_sse_of(grams_, columns, response_, fit);
      }
    });
    for (std::size_t i = 0; i < unseen.size(); ++i) known_.emplace(*unseen[i], scores[i]);
    Ranked best{std::numeric_limits<double>::infinity(), {}};
    for (const Choices& candidate : candidates) best = std::min(best, Ranked{known_.at(candidate), candidate});
    return best;
  }

  /// The best of all that are separable, best first.
  std::vector<Choices> best_of_all(std::size_t keep) const {
    std::vector<Ranked> all;
    for (const auto& [choice, score] : known_)
      if (std::isfinite(score)) all.emplace_back(score, choice);
    std::sort(all.begin(), all.end());
    all.resize(std::min(keep, all.size()));
    std::vector<Choices> result;
    for (auto& [score, choice] : all) result.push_back(std::move(choice));
    return result;
  }

 private:
  const Space& space_;
  const base::GramSet& grams_;
  std::size_t response_;
  unsigned threads_;
  std::map<Choices, double> known_;
};

}  // namespace

std::vector<Choices> single_changes(const Space& space, const Choices& from) {
  const std::size_t most_terms = space.max_terms.value_or(space.predictors.size());
  const std::size_t terms = n_terms(from);
  std::vector<Choices> changes;
  for (std::size_t j = 0; j < from.size(); ++j) {
    const PredictorChoices& predictor = space.predictors[j];
    if (from[j] == 0 && terms >= most_terms) continue;
    for (std::size_t c = predictor.always ? 1 : 0; c <= predictor.forms.size(); ++c) {
      if (c == from[j]) continue;
      changes.push_back(from);
      changes.back()[j] = static_cast<std::uint16_t>(c);
    }
  }
  return changes;
}

std::vector<Choice> descend(const Space& space, const base::GramSet& grams, std::size_t response,
                            const DescentOptions& options) {
  const Choices start = options.from.empty() ? least_choice(space) : options.from;
  if (!admits(space, start)) return {};
  Scores scores(space, grams, response, options.threads);
  Ranked at{scores.best({start}).first, start};
  for (std::size_t move = 0; move < options.most_moves && !options.stop.stop_requested(); ++move) {
    Ranked next = scores.best(single_changes(space, at.second));
    if (!(next.first < at.first)) break;
    at = std::move(next);
  }
  std::vector<Choice> result;
  for (Choices& choice : scores.best_of_all(options.keep)) result.push_back({response, std::move(choice)});
  return result;
}

}  // namespace formsieve::search

#include "pipeline/inseparable.hpp"

#include "pipeline/estimate.hpp"
#include "search/inseparable.hpp"

namespace formsieve::pipeline {

namespace {

/// Pairs that are named one by one; of more, their number.
constexpr std::size_t kMostNamed = 5;

const std::string& label(const Prepared& prepared, std::size_t predictor, std::uint16_t choice) {
  return prepared.menus[predictor].labels[choice - 1U];
}

std::string words_of(const search::InseparablePair& pair, const Prepared& prepared) {
  const std::string first = label(prepared, pair.first, pair.first_choice);
  if (pair.first == pair.second)
    return first +
           " is nearly the same on all rows, or on all training rows of some fold; candidates with it are not scored.";
  std::string text = "'" + prepared.menus[pair.first].column + "' and '" + prepared.menus[pair.second].column +
                     "' cannot be told apart on all rows or in some fold: as " + first + " and " +
                     label(prepared, pair.second, pair.second_choice);
  if (pair.n_pairs_of_forms > 1)
    text += ", and as " + grouped(pair.n_pairs_of_forms - 1) +
            (pair.n_pairs_of_forms > 2 ? " other pairs" : " other pair") + " of forms";
  return text + ". Candidates with both are not scored; leave one of the two out (data.ignore).";
}

}  // namespace

std::vector<std::string> inseparable_words(const Prepared& prepared, const base::GramSet& grams,
                                           const search::WalkResult& walked, double smallest_pivot_rel) {
  if (walked.n_inseparable == 0) return {};
  const auto pairs = search::inseparable_pairs(prepared.space, grams, smallest_pivot_rel);
  std::vector<std::string> words;
  for (const auto& pair : pairs) {
    if (words.size() == kMostNamed) break;
    words.push_back(words_of(pair, prepared));
  }
  if (pairs.size() > kMostNamed)
    words.push_back(grouped(pairs.size() - kMostNamed) + " more pairs of predictors cannot be told apart either.");
  if (pairs.empty())
    words.push_back(
        "Inseparable candidates: no two predictors alone are behind them, but three or more together, or more columns "
        "than training rows.");
  return words;
}

}  // namespace formsieve::pipeline

#include "plain/walk.hpp"

#include "plain/partial_grams.hpp"
#include "plain/subtree_walker.hpp"
#include "plain/tree.hpp"

#include <algorithm>
#include <limits>

namespace formsieve::plain {

using namespace search;

WalkResult walk(const Space& space, const base::GramSet& grams, const WalkOptions& options) {
  const Tree tree(space);
  const Root root(tree, grams, options.smallest_pivot_rel);
  SubtreeWalker walker(tree, root, options, std::numeric_limits<std::uint64_t>::max());
  WalkResult result;
  result.lists.assign(options.rules.size(), std::vector<std::vector<Scored>>(space.n_responses));
  if (tree.size(0, tree.n_predictors()) == 0) return result;
  walker.enter({});
  walker.walk();
  result.n_scored = walker.n_scored();
  result.n_inseparable = walker.n_inseparable();
  for (std::size_t rule = 0; rule < options.rules.size(); ++rule) {
    for (std::size_t r = 0; r < space.n_responses; ++r) {
      const double unit = grams.response_scale[r] * grams.response_scale[r];
      const auto entries = walker.list(rule, r).entries();
      std::vector<Listed> best(entries.begin(), entries.end());
      std::sort(best.begin(), best.end(), better);
      for (const Listed& listed : best) {
        Scored scored{{r, std::vector<std::uint16_t>(space.predictors.size(), 0)},
                      0,
                      listed.cv_sse * unit,
                      listed.rss * unit,
                      listed.n_columns};
        for (const TermCode term : listed.terms) scored.choice.choice[predictor_of(term)] = choice_of(term);
        scored.number = number_of(space, scored.choice);
        result.lists[rule][r].push_back(std::move(scored));
      }
    }
  }
  return result;
}

}  // namespace formsieve::plain

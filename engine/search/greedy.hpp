// A good candidate by penalised RSS, found quickly: the unit of the Akaike weights, and which predictors matter.
#pragma once

#include "search/outer_grams.hpp"
#include "search/outer_tree.hpp"

#include <cstddef>
#include <vector>

namespace formsieve::search {

struct Greedy {
  double penalised_rss;                 ///< the smallest RSS · factor[k] met; infinite when there is none
  std::vector<std::size_t> predictors;  ///< in the order of selection, as long as each lowered it
};

/// Forward selection: at each step the form that lowers RSS · factor[k] most. Not the best of the space, but near it.
/// `factor`: [most columns + 1]; infinite entries are passed over. Cost: a few Gram eliminations.
Greedy forward_selection(const OuterTree& tree, const OuterGrams& root, std::size_t response,
                         const std::vector<double>& factor, double smallest_pivot_rel);

}  // namespace formsieve::search

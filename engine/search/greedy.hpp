// A good candidate by penalised RSS, found quickly: the unit of the Akaike weights.
#pragma once

#include "search/outer_grams.hpp"
#include "search/outer_tree.hpp"

#include <cstddef>
#include <vector>

namespace formsieve::search {

/// The smallest RSS · factor[k] met by forward selection: at each step the form that lowers it most. Not the best of the
/// space, but near it. `factor`: [most columns + 1]; infinite entries are passed over. Cost: a few Gram eliminations.
double greedy_penalised_rss(const OuterTree& tree, const OuterGrams& root, std::size_t response,
                            const std::vector<double>& factor, double smallest_pivot_rel);

}  // namespace formsieve::search

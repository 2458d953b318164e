#include "search/pair_kernel.hpp"
#include "search/saturating.hpp"

#include <algorithm>
#include <cassert>
#include <limits>

namespace formsieve::search {

namespace {

/// [picks left][open predictors] candidates, the one without further picks among them.
std::vector<std::vector<std::uint64_t>> count_subsets(const std::vector<std::size_t>& n_forms, std::size_t most_picks) {
  std::vector<std::vector<std::uint64_t>> sizes(most_picks + 1, std::vector<std::uint64_t>(n_forms.size() + 1, 1));
  for (std::size_t picks = 1; picks <= most_picks; ++picks)
    for (std::size_t open = 1; open <= n_forms.size(); ++open)
      sizes[picks][open] =
          saturating_add(sizes[picks][open - 1], saturating_multiply(n_forms[open - 1], sizes[picks - 1][open - 1]));
  return sizes;
}

/// The two last predictors share a vector where there is room; otherwise each starts one of its own.
std::size_t lanes_of_first(const std::vector<std::size_t>& n_forms) {
  if (n_forms.size() > 1 && n_forms[0] + n_forms[1] <= kLanes) return n_forms[0];
  return padded(n_forms[0]);
}

}  // namespace

PairShape::PairShape(const std::vector<std::size_t>& n_forms, std::size_t picks)
    : most_picks(std::min(picks, n_forms.size())), first_lane{0}, n_columns{0}, row_offset{0} {
  for (std::size_t p = 0; p < n_forms.size(); ++p) {
    assert(n_forms[p] > 0);
    const std::size_t first = first_lane.back();
    const std::size_t end = p == 0 ? lanes_of_first(n_forms) : first + n_forms[p];
    for (std::size_t lane = first; lane < end; ++lane) {
      predictor_of_lane.push_back(p);
      row_length.push_back(padded(first));
      row_offset.push_back(row_offset.back() + 2 * padded(first));
    }
    first_lane.push_back(end);
    n_columns.push_back(n_columns.back() + n_forms[p]);
  }
  sizes = count_subsets(n_forms, most_picks);
}

}  // namespace formsieve::search

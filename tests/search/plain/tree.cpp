#include "plain/tree.hpp"

#include <algorithm>
#include <functional>
#include <numeric>
#include <tuple>

namespace formsieve::plain {

using namespace search;

namespace {

std::size_t widest(const PredictorChoices& predictor) {
  std::size_t columns = 0;
  for (const FormBlock& form : predictor.forms) columns = std::max(columns, form.n_columns);
  return columns;
}

/// Plan indices in visiting order; see the head of tree.hpp for why.
std::vector<std::size_t> visiting_order(const Space& space) {
  std::vector<std::size_t> order(space.predictors.size());
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::stable_sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) {
    const auto key = [&](std::size_t j) {
      const PredictorChoices& predictor = space.predictors[j];
      return std::tuple(predictor.always, widest(predictor), -static_cast<std::ptrdiff_t>(predictor.forms.size()));
    };
    return key(a) < key(b);
  });
  return order;
}

/// Columns of the widest candidate: the sum of the `most` largest widths.
std::size_t sum_of_largest(std::vector<std::size_t> widths, std::size_t most) {
  std::sort(widths.begin(), widths.end(), std::greater<>());
  widths.resize(std::min(most, widths.size()));
  return std::accumulate(widths.begin(), widths.end(), std::size_t{0});
}

}  // namespace

std::uint64_t saturating_add(std::uint64_t a, std::uint64_t b) {
  return a >= Tree::kMostCandidates - std::min(b, Tree::kMostCandidates) ? Tree::kMostCandidates : a + b;
}

std::uint64_t saturating_multiply(std::uint64_t a, std::uint64_t b) {
  if (a == 0 || b == 0) return 0;
  return a >= Tree::kMostCandidates / b ? Tree::kMostCandidates : a * b;
}

Tree::Tree(const Space& space) : n_responses_(space.n_responses) {
  const std::size_t n_predictors = space.predictors.size();
  n_always_ = static_cast<std::size_t>(std::count_if(space.predictors.begin(), space.predictors.end(),
                                                     [](const PredictorChoices& p) { return p.always; }));
  max_depth_ = std::min(space.max_terms.value_or(n_predictors), n_predictors);
  possible_ = max_depth_ >= n_always_;
  arrange(space, visiting_order(space));
  std::vector<std::size_t> widths;
  for (const PredictorChoices& predictor : space.predictors) widths.push_back(widest(predictor));
  widest_form_ = std::max<std::size_t>(1, sum_of_largest(widths, 1));
  most_columns_ = sum_of_largest(widths, max_depth_);
  count_subtrees();
}

void Tree::arrange(const Space& space, std::span<const std::size_t> order) {
  form_start_ = {0};
  column_start_ = {0};
  row_offset_ = {0};
  bool any_wide = false;
  for (const std::size_t j : order) {
    const std::size_t predictor_start = gram_column_.size();
    const std::size_t position = form_start_.size() - 1;
    const std::vector<FormBlock>& menu = space.predictors[j].forms;
    for (std::size_t f = 0; f < menu.size(); ++f) {
      forms_.push_back({j, position, static_cast<std::uint16_t>(f + 1), gram_column_.size(), menu[f].n_columns});
      for (std::size_t c = 0; c < menu[f].n_columns; ++c) {
        if (menu[f].n_columns > 1) any_wide = true;
        if (!any_wide) first_wide_column_ = gram_column_.size() + 1;
        row_length_.push_back(menu[f].n_columns == 1 ? predictor_start : gram_column_.size());
        row_offset_.push_back(row_offset_.back() + row_length_.back());
        gram_column_.push_back(menu[f].first_column + c);
      }
    }
    form_start_.push_back(forms_.size());
    column_start_.push_back(gram_column_.size());
  }
}

void Tree::count_subtrees() {
  const std::size_t n_optional = n_predictors() - n_always_;
  const std::size_t most_picks = possible_ ? max_depth_ - n_always_ : 0;
  // One more open predictor adds, for each of its forms, everything below with one pick fewer.
  size_.assign(most_picks + 1, std::vector<std::uint64_t>(n_optional + 1, 1));
  for (std::size_t picks = 1; picks <= most_picks; ++picks) {
    for (std::size_t open = 0; open < n_optional; ++open) {
      const std::uint64_t forms = form_start_[open + 1] - form_start_[open];
      size_[picks][open + 1] = saturating_add(size_[picks][open], saturating_multiply(forms, size_[picks - 1][open]));
    }
  }
}

std::uint64_t Tree::size(std::size_t depth, std::size_t open) const {
  if (!possible_) return 0;
  if (is_candidate(depth)) return size_[max_depth_ - depth][open];
  std::uint64_t total = size_.back().back();
  for (std::size_t q = n_predictors() - n_always_; q < open; ++q)
    total = saturating_multiply(total, form_start_[q + 1] - form_start_[q]);
  return total;
}

}  // namespace formsieve::plain

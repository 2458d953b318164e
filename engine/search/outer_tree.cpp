#include "search/outer_tree.hpp"

#include "search/saturating.hpp"

#include <algorithm>
#include <functional>
#include <numeric>
#include <tuple>

namespace formsieve::search {

namespace {

std::size_t widest(const PredictorChoices& predictor) {
  std::size_t columns = 0;
  for (const FormBlock& form : predictor.forms) columns = std::max(columns, form.n_columns);
  return columns;
}

bool is_wide(const FormBlock& form) { return form.n_columns > 1; }

std::size_t count_simple(const PredictorChoices& predictor) {
  return static_cast<std::size_t>(std::count_if(predictor.forms.begin(), predictor.forms.end(),
                                                [](const FormBlock& form) { return !is_wide(form); }));
}

/// Columns of the widest candidate: the sum of the `most` largest widths.
std::size_t sum_of_largest(std::vector<std::size_t> widths, std::size_t most) {
  std::sort(widths.begin(), widths.end(), std::greater<>());
  widths.resize(std::min(most, widths.size()));
  return std::accumulate(widths.begin(), widths.end(), std::size_t{0});
}

template <class Key>
std::vector<std::size_t> sorted(std::vector<std::size_t> predictors, const Key& key) {
  std::stable_sort(predictors.begin(), predictors.end(), [&](std::size_t a, std::size_t b) { return key(a) < key(b); });
  return predictors;
}

/// Multiplies a polynomial in the number of picks by (absent + present · x), keeping its length.
void multiply(std::vector<std::uint64_t>& counts, std::uint64_t absent, std::uint64_t present) {
  for (std::size_t k = counts.size(); k-- > 0;) {
    const std::uint64_t with = k > 0 ? saturating_multiply(counts[k - 1], present) : 0;
    counts[k] = saturating_add(saturating_multiply(counts[k], absent), with);
  }
}

}  // namespace

OuterTree::OuterTree(const Space& space, const std::vector<std::size_t>& strong)
    : n_responses_(space.n_responses),
      n_predictors_(space.predictors.size()),
      n_simple_(space.predictors.size(), 0),
      wide_group_(space.predictors.size(), kNoGroup) {
  std::vector<std::size_t> simple;
  std::vector<std::size_t> wide;
  std::vector<std::size_t> always;
  std::vector<std::size_t> widths;
  for (std::size_t j = 0; j < n_predictors_; ++j) {
    const PredictorChoices& predictor = space.predictors[j];
    widths.push_back(widest(predictor));
    if (predictor.always) {
      always.push_back(j);
      continue;
    }
    n_simple_[j] = count_simple(predictor);
    if (n_simple_[j] > 0) simple.push_back(j);
    if (n_simple_[j] < predictor.forms.size()) wide.push_back(j);
  }
  n_always_ = always.size();
  most_terms_ = std::min(space.max_terms.value_or(n_predictors_), n_predictors_);
  most_columns_ = sum_of_largest(widths, most_terms_);

  // at the bottom those with most forms, so that few nodes hold many candidates, as long as they fill one vector
  const auto forms_falling = [&](std::size_t j) {
    const auto rank = std::find(strong.begin(), strong.end(), j);
    return std::tuple(-(rank - strong.begin()), n_simple_[j] > kLanes, -static_cast<std::ptrdiff_t>(n_simple_[j]));
  };
  for (const std::size_t j : sorted(simple, forms_falling)) {
    SimplePredictor entry{j, {}, gram_column_.size()};
    for (std::size_t f = 0; f < space.predictors[j].forms.size(); ++f) {
      if (is_wide(space.predictors[j].forms[f])) continue;
      entry.choices.push_back(static_cast<std::uint16_t>(f + 1));
      gram_column_.push_back(space.predictors[j].forms[f].first_column);
    }
    simple_.push_back(std::move(entry));
  }
  const auto wide_rising = [&](std::size_t j) {
    const PredictorChoices& predictor = space.predictors[j];
    return std::tuple(widest(predictor), -static_cast<std::ptrdiff_t>(predictor.forms.size()));
  };
  for (const std::size_t j : sorted(wide, wide_rising)) {
    wide_group_[j] = n_groups();
    add_group(space, j, true);
  }
  for (const std::size_t j : sorted(always, wide_rising)) add_group(space, j, false);
}

void OuterTree::add_group(const Space& space, std::size_t predictor, bool wide_only) {
  const auto& forms = space.predictors[predictor].forms;
  for (std::size_t f = 0; f < forms.size(); ++f) {
    if (wide_only && !is_wide(forms[f])) continue;
    forms_.push_back(
        {predictor, static_cast<std::uint16_t>(f + 1), n_groups(), gram_column_.size(), forms[f].n_columns});
    for (std::size_t c = 0; c < forms[f].n_columns; ++c) gram_column_.push_back(forms[f].first_column + c);
  }
  group_start_.push_back(forms_.size());
}

std::uint64_t OuterTree::size(std::span<const std::size_t> path) const {
  if (!possible()) return 0;
  std::vector<std::uint64_t> counts(most_terms_ - path.size() + 1, 0);
  counts[0] = 1;
  const std::size_t open = open_groups(path);
  std::vector<bool> picked(n_predictors_, false);
  for (const std::size_t form : path) picked[forms_[form].predictor] = true;
  for (std::size_t g = 0; g < open; ++g) {
    const std::size_t j = forms_[first_form(g)].predictor;
    if (wide_group_[j] == kNoGroup) multiply(counts, 0, end_form(g) - first_form(g));
  }
  for (std::size_t j = 0; j < n_predictors_; ++j) {
    if (picked[j] || (n_simple_[j] == 0 && wide_group_[j] == kNoGroup)) continue;
    const std::size_t g = wide_group_[j];
    const std::size_t n_wide = g != kNoGroup && g < open ? end_form(g) - first_form(g) : 0;
    multiply(counts, 1, n_simple_[j] + n_wide);
  }
  std::uint64_t total = 0;
  for (const std::uint64_t count : counts) total = saturating_add(total, count);
  return total;
}

std::vector<std::size_t> OuterTree::open_simple(std::span<const std::size_t> path) const {
  std::vector<std::size_t> open;
  for (std::size_t s = 0; s < simple_.size(); ++s) {
    const bool taken = std::any_of(path.begin(), path.end(),
                                   [&](std::size_t form) { return forms_[form].predictor == simple_[s].predictor; });
    if (!taken) open.push_back(s);
  }
  return open;
}

PairShape OuterTree::shape(std::span<const std::size_t> open_simple, std::size_t most_picks) const {
  std::vector<std::size_t> n_forms;
  for (const std::size_t s : open_simple) n_forms.push_back(simple_[s].choices.size());
  return PairShape(n_forms, most_picks);
}

}  // namespace formsieve::search

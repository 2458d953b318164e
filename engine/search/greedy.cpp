#include "search/greedy.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <utility>

namespace formsieve::search {

namespace {

/// The matrix of all rows with what has been picked eliminated, and one response in the last place.
class Forward {
 public:
  Forward(const OuterGrams& root, std::size_t response, double smallest_rel)
      : n_(root.n_columns()), width_(n_ + 1), a_(width_ * width_) {
    const double* const all = root.training(root.n_folds());
    const auto from = [&](std::size_t i) { return i < n_ ? i : n_ + response; };
    for (std::size_t i = 0; i < width_; ++i)
      for (std::size_t j = 0; j < width_; ++j) a_[i * width_ + j] = all[from(i) * root.order() + from(j)];
    for (std::size_t c = 0; c < n_; ++c) smallest_.push_back(smallest_rel * a_[c * (width_ + 1)]);
  }

  double rss() const { return std::max(0.0, a_.back()); }

  /// The RSS with a form's columns in; infinite when they are not separable.
  double rss_with(std::size_t first, std::size_t n_columns) const {
    // the small matrix of the form and the response
    std::vector<std::size_t> at(n_columns + 1, n_);
    for (std::size_t c = 0; c < n_columns; ++c) at[c] = first + c;
    std::vector<double> small(at.size() * at.size());
    for (std::size_t i = 0; i < at.size(); ++i)
      for (std::size_t j = 0; j < at.size(); ++j) small[i * at.size() + j] = a_[at[i] * width_ + at[j]];
    for (std::size_t c = 0; c < n_columns; ++c) {
      if (!(small[c * (at.size() + 1)] > smallest_[first + c])) return std::numeric_limits<double>::infinity();
      eliminate(small, at.size(), c, c + 1);
    }
    return std::max(0.0, small.back());
  }

  void bring_in(std::size_t first, std::size_t n_columns) {
    for (std::size_t c = first; c < first + n_columns; ++c) eliminate(a_, width_, c, 0);
  }

 private:
  static void eliminate(std::vector<double>& a, std::size_t width, std::size_t c, std::size_t from) {
    for (std::size_t i = from; i < width; ++i) {
      if (i == c) continue;
      const double m = a[i * width + c] / a[c * width + c];
      for (std::size_t j = from; j < width; ++j)
        if (j != c) a[i * width + j] -= m * a[c * width + j];
    }
    for (std::size_t i = from; i < width; ++i)
      if (i != c) a[i * width + c] = a[c * width + i] = 0.0;
  }

  std::size_t n_, width_;
  std::vector<double> a_, smallest_;
};

struct Option {
  std::size_t predictor, first, n_columns;
  bool always;
};

std::vector<Option> options_of(const OuterTree& tree) {
  std::vector<Option> options;
  for (const OuterForm& form : tree.forms())
    options.push_back({form.predictor, form.first_column, form.n_columns, tree.is_always(form.group)});
  for (const SimplePredictor& simple : tree.simple())
    for (std::size_t f = 0; f < simple.choices.size(); ++f)
      options.push_back({simple.predictor, simple.first_column + f, 1, false});
  return options;
}

}  // namespace

Greedy forward_selection(const OuterTree& tree, const OuterGrams& root, std::size_t response,
                         const std::vector<double>& factor, double smallest_pivot_rel) {
  std::vector<std::size_t> selected;
  Forward model(root, response, smallest_pivot_rel);
  std::vector<Option> options = options_of(tree);
  std::size_t n_columns = 0;
  double best = tree.n_always() == 0 ? model.rss() * factor[0] : std::numeric_limits<double>::infinity();
  for (std::size_t terms = 0; terms < tree.most_terms(); ++terms) {
    const bool forced = terms < tree.n_always();
    double found = std::numeric_limits<double>::infinity();
    const Option* pick = nullptr;
    for (const Option& option : options) {
      if (forced && !option.always) continue;
      const double score = model.rss_with(option.first, option.n_columns) * factor[n_columns + option.n_columns];
      if (score < found) {
        found = score;
        pick = &option;
      }
    }
    if (pick == nullptr || (!forced && found >= best)) break;
    model.bring_in(pick->first, pick->n_columns);
    n_columns += pick->n_columns;
    if (terms + 1 >= tree.n_always()) best = std::min(best, found);
    const std::size_t predictor = pick->predictor;
    selected.push_back(predictor);
    std::erase_if(options, [&](const Option& option) { return option.predictor == predictor; });
  }
  return {best, std::move(selected)};
}

}  // namespace formsieve::search

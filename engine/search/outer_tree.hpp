// The upper part of the tree of candidates: the picks that the pair kernel does not make.
//
// A candidate is a set of forms. Its forms of predictors that are always in, and its forms of several columns, are
// picked first, one by one, in the outer tree; below every outer node the pair kernel takes all sets of single-column
// forms of the other predictors. A predictor with both kinds of forms takes part in both: where the outer tree has
// picked one of its wide forms, the kernel leaves it out.
#pragma once

#include "search/pair_kernel.hpp"
#include "search/space.hpp"

#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

namespace formsieve::search {

/// A form picked in the outer tree.
struct OuterForm {
  std::size_t predictor = 0;     ///< in plan order
  std::uint16_t choice = 1;      ///< 1 + form index in the space
  std::size_t group = 0;         ///< where in the order of picks
  std::size_t first_column = 0;  ///< in the order of columns of the outer matrices
  std::size_t n_columns = 1;
};

/// The single-column forms of a predictor that may be absent.
struct SimplePredictor {
  std::size_t predictor = 0;
  std::vector<std::uint16_t> choices;
  std::size_t first_column = 0;
};

/// An outer node: indices into OuterTree::forms, groups falling.
using OuterPath = std::vector<std::size_t>;

class OuterTree {
 public:
  /// `strong`: predictors (in plan order, strongest first) that the kernel picks first, so that what stays open to the
  /// bottom are those that matter least: there the best with any form, and without, are close to each other, and a
  /// node is seldom better than what is known.
  explicit OuterTree(const Space& space, const std::vector<std::size_t>& strong = {});

  std::size_t n_responses() const { return n_responses_; }
  std::size_t n_predictors() const { return n_predictors_; }
  /// Design columns of the space, in the order of the outer matrices: simple predictors, then outer groups rising.
  const std::vector<std::size_t>& gram_column() const { return gram_column_; }
  const std::vector<OuterForm>& forms() const { return forms_; }
  const std::vector<SimplePredictor>& simple() const { return simple_; }
  std::size_t n_groups() const { return group_start_.size() - 1; }
  std::size_t n_always() const { return n_always_; }
  /// The groups of what is always in come last.
  bool is_always(std::size_t group) const { return group >= n_groups() - n_always_; }
  std::size_t first_form(std::size_t group) const { return group_start_[group]; }
  std::size_t end_form(std::size_t group) const { return group_start_[group + 1]; }

  /// Most predictors of a candidate, and most design columns.
  std::size_t most_terms() const { return most_terms_; }
  std::size_t most_columns() const { return most_columns_; }

  /// False when max_terms leaves no candidate at all.
  bool possible() const { return most_terms_ >= n_always_; }
  /// True when everything that is always in has been picked.
  bool is_candidate(std::span<const std::size_t> path) const { return path.size() >= n_always_; }
  /// Groups from which the next pick may come: [first, open).
  std::size_t open_groups(std::span<const std::size_t> path) const {
    return path.empty() ? n_groups() : forms_[path.back()].group;
  }
  std::size_t first_group(std::span<const std::size_t> path) const {
    return is_candidate(path) ? 0 : open_groups(path) - 1;
  }
  bool may_pick(std::span<const std::size_t> path) const { return path.size() < most_terms_ && open_groups(path) > 0; }
  /// Candidates of one response at and below a node; saturates.
  std::uint64_t size(std::span<const std::size_t> path) const;

  /// Simple predictors that are open to the kernel at a node, as indices into simple().
  std::vector<std::size_t> open_simple(std::span<const std::size_t> path) const;
  /// The kernel's shape over them.
  PairShape shape(std::span<const std::size_t> open_simple, std::size_t most_picks) const;

 private:
  void add_group(const Space& space, std::size_t predictor, bool wide_only);

  std::size_t n_responses_, n_predictors_, n_always_ = 0, most_terms_ = 0, most_columns_ = 0;
  std::vector<std::size_t> gram_column_;
  std::vector<OuterForm> forms_;
  std::vector<std::size_t> group_start_{0};
  std::vector<SimplePredictor> simple_;
  std::vector<std::size_t> n_simple_;    ///< [predictor] single-column forms of one that may be absent
  std::vector<std::size_t> wide_group_;  ///< [predictor] its outer group, or kNoGroup
  static constexpr std::size_t kNoGroup = ~std::size_t{0};
};

}  // namespace formsieve::search

#include "problem.hpp"
#include "search/outer_tree.hpp"
#include "search/parts.hpp"
#include "search/saturating.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <set>

using namespace formsieve;
using search::OuterTree;
using search::PairShape;
using search::Space;

namespace {

Space example() {
  Space space =
      test::make_problem(1, 4, {{{1, 1}}, {{1, 1, 1}, true}, {{2}}, {{1}}, {{1, 3, 1}}, {{1, 1}, true}}, 2, 2).space;
  space.max_terms = 5;
  return space;
}

/// Candidates at and below an outer node by going through it.
std::uint64_t counted(const OuterTree& tree, search::OuterPath& path) {
  std::uint64_t total = 0;
  if (tree.is_candidate(path)) {
    const PairShape shape = tree.shape(tree.open_simple(path), tree.most_terms() - path.size());
    total += shape.size(shape.most_picks, shape.n_predictors());
  }
  if (!tree.may_pick(path)) return total;
  for (std::size_t g = tree.first_group(path), open = tree.open_groups(path); g < open; ++g) {
    for (std::size_t form = tree.first_form(g); form < tree.end_form(g); ++form) {
      path.push_back(form);
      total += counted(tree, path);
      path.pop_back();
    }
  }
  return total;
}

/// Candidates that a part holds itself.
std::uint64_t own_size(const OuterTree& tree, const search::Part& part, std::uint64_t largest) {
  if (part.with_outer) return tree.size(part.outer);
  if (!tree.is_candidate(part.outer)) return 0;
  const PairShape shape = tree.shape(tree.open_simple(part.outer), tree.most_terms() - part.outer.size());
  const std::size_t open = part.lanes.empty() ? shape.n_predictors() : shape.predictor_of_lane[part.lanes.back()];
  const std::size_t picks = shape.most_picks - part.lanes.size();
  std::uint64_t total = shape.size(picks, open);
  // below the root of the kernel the node itself and its single columns belong to the part above
  if (!part.lanes.empty()) total -= 1 + shape.columns(open);
  for (std::size_t p = 2; p < open && picks >= 3; ++p)
    if (shape.size(picks - 1, p) > largest)
      total -= (shape.columns(p + 1) - shape.columns(p)) * (shape.size(picks - 1, p) - 1 - shape.columns(p));
  return total;
}

}  // namespace

TEST_CASE("search: outer tree sizes equal the number of candidates below each node", "[search][unit]") {
  Space space = example();
  for (const std::size_t max_terms : {2u, 3u, 4u, 5u, 6u}) {
    space.max_terms = max_terms;
    const OuterTree tree(space);
    CHECK(tree.size({}) * 2 == search::count(space).convert_to<std::uint64_t>());
    search::OuterPath path;
    CHECK(counted(tree, path) == tree.size({}));
    path = {tree.first_form(tree.n_groups() - 1)};
    CHECK(counted(tree, path) == tree.size(path));
  }
}

TEST_CASE("search: forms of several columns and what is always in are picked first", "[search][unit]") {
  const OuterTree tree(example());
  std::vector<std::size_t> outer;
  for (std::size_t g = tree.n_groups(); g-- > 0;) outer.push_back(tree.forms()[tree.first_form(g)].predictor);
  // 5 and 1 are always in; 4 has a form of three columns, 2 of two
  CHECK(outer == std::vector<std::size_t>{5, 1, 4, 2});
  std::vector<std::size_t> simple;
  for (const auto& entry : tree.simple()) simple.push_back(entry.predictor);
  CHECK(simple == std::vector<std::size_t>{0, 4, 3});
  // the kernel leaves out a predictor whose wide form was picked
  const search::OuterPath wide = {tree.first_form(3), tree.first_form(2), tree.first_form(1)};
  CHECK(tree.open_simple(wide).size() == 2);
}

TEST_CASE("search: counts saturate instead of overflowing", "[search][unit]") {
  Space space;
  space.predictors.resize(40);
  for (auto& predictor : space.predictors) predictor.forms.resize(6);
  CHECK(OuterTree(space).size({}) == search::kCountless);
  const PairShape shape(std::vector<std::size_t>(40, 6), 40);
  CHECK(shape.size(40, 40) == search::kCountless);
  CHECK(shape.size(40, 10) == 282475249);  // 7^10
  CHECK(search::saturating_add(search::kCountless - 1, 5) == search::kCountless);
  CHECK(search::saturating_multiply(std::uint64_t{1} << 40, std::uint64_t{1} << 40) == search::kCountless);
}

TEST_CASE("search: the parts are different and hold every candidate once", "[search][unit]") {
  Space space =
      test::make_problem(1, 4, {{{1, 1}}, {{1, 2}}, {{1, 1, 1}}, {{1, 3}, true}, {{1, 1}}, {{1}}, {{1, 1}}}, 1, 2)
          .space;
  for (const std::size_t max_terms : {2u, 4u, 7u}) {
    space.max_terms = max_terms;
    const OuterTree tree(space);
    for (const std::uint64_t largest : {1u, 5u, 50u, 1000000u}) {
      const auto parts = search::split(tree, largest);
      std::set<std::pair<search::OuterPath, std::vector<std::size_t>>> places;
      std::uint64_t total = 0;
      for (const auto& part : parts) {
        places.emplace(part.outer, part.lanes);
        total += own_size(tree, part, largest);
      }
      CHECK(places.size() == parts.size());
      CHECK(total == tree.size({}));
    }
    CHECK(search::split(tree, 1000000u).size() == 1);
  }
}

TEST_CASE("search: a large space is split into parts for many cores", "[search][unit]") {
  Space space;
  space.predictors.resize(10);
  for (auto& predictor : space.predictors) predictor.forms.resize(6);
  const OuterTree tree(space);
  const auto parts = search::split(tree, search::largest_subtree(tree));
  CHECK(parts.size() >= 1000);
  CHECK(parts.size() <= 50000);
}

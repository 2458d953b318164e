#include "problem.hpp"
#include "search/tasks.hpp"
#include "search/tree.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <set>

using namespace formsieve;
using search::Space;
using search::Tree;

namespace {

/// Candidates in the subtree of a node by going through it.
std::uint64_t counted(const Tree& tree, std::size_t depth, std::size_t open) {
  std::uint64_t total = tree.is_candidate(depth) ? 1 : 0;
  if (!tree.has_children(depth, open)) return total;
  for (std::size_t q = tree.first_pick(depth, open); q < open; ++q)
    total += (tree.n_forms(q + 1) - tree.n_forms(q)) * counted(tree, depth + 1, q);
  return total;
}

Space example() {
  Space space =
      test::make_problem(1, 4, {{{1, 1}}, {{1, 1, 1}, true}, {{2}}, {{1}}, {{1, 3, 1}}, {{1, 1}, true}}, 2, 2).space;
  space.max_terms = 5;
  return space;
}

}  // namespace

TEST_CASE("search: tree sizes equal the number of candidates below each node", "[search][unit]") {
  Space space = example();
  for (const std::size_t max_terms : {2u, 3u, 4u, 5u, 6u}) {
    space.max_terms = max_terms;
    const Tree tree(space);
    CHECK(tree.size(0, 6) * 2 == search::count(space).convert_to<std::uint64_t>());
    CHECK(tree.size(0, 6) == counted(tree, 0, 6));
    CHECK(tree.size(1, 5) == counted(tree, 1, 5));
    for (std::size_t open = 0; open <= 4; ++open) CHECK(tree.size(2, open) == counted(tree, 2, open));
  }
}

TEST_CASE("search: tree picks what is always in first and wide forms early", "[search][unit]") {
  const Tree tree(example());
  std::vector<std::size_t> predictors;
  for (const auto& form : tree.forms())
    if (predictors.empty() || predictors.back() != form.predictor) predictors.push_back(form.predictor);
  // the last is picked first: 5 and 1 are always in, 4 has a form of three columns, 2 of two; 0 has most forms
  CHECK(predictors == std::vector<std::size_t>{0, 3, 2, 4, 1, 5});
}

TEST_CASE("search: tree sizes saturate instead of overflowing", "[search][unit]") {
  Space space;
  space.predictors.resize(40);
  for (auto& predictor : space.predictors) predictor.forms.resize(6);
  const Tree tree(space);
  CHECK(tree.size(0, 40) == Tree::kMostCandidates);
  CHECK(tree.size(0, 10) == 282475249);  // 7^10
  CHECK(search::saturating_add(Tree::kMostCandidates - 1, 5) == Tree::kMostCandidates);
  CHECK(search::saturating_multiply(std::uint64_t{1} << 40, std::uint64_t{1} << 40) == Tree::kMostCandidates);
}

TEST_CASE("search: the split is into different nodes, each of which is large", "[search][unit]") {
  Space space = example();
  const Tree tree(space);
  for (const std::uint64_t limit : {1u, 5u, 20u, 1000000u}) {
    const auto parts = search::split(tree, limit);
    CHECK(std::set<search::Path>(parts.begin(), parts.end()).size() == parts.size());
    for (const auto& path : parts)
      if (!path.empty()) CHECK(tree.size(path.size(), tree.forms()[path.back()].position) > limit);
  }
  CHECK(search::split(tree, 1000000u).size() == 1);
  CHECK(search::split(tree, 1u).size() > 50);
}

TEST_CASE("search: a large space is split into several hundred parts", "[search][unit]") {
  Space space;
  space.predictors.resize(8);
  for (auto& predictor : space.predictors) predictor.forms.resize(6);
  const Tree tree(space);
  const auto parts = search::split(tree, search::largest_subtree(tree));
  CHECK(parts.size() >= 300);
  CHECK(parts.size() <= 20000);
}

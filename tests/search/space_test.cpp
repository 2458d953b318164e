#include "problem.hpp"
#include "search/space.hpp"

#include <catch2/catch.hpp>

#include <string>

using namespace formsieve;
using search::BigCount;
using search::Choice;
using search::Space;

namespace {

/// Predictors with the given numbers of forms.
Space space_of(const std::vector<std::size_t>& n_forms, std::size_t n_responses = 1) {
  Space space;
  space.n_responses = n_responses;
  for (const std::size_t n : n_forms) {
    space.predictors.emplace_back();
    space.predictors.back().forms.resize(n);
  }
  return space;
}

std::size_t terms(const Choice& choice) {
  std::size_t n = 0;
  for (const auto c : choice.choice) n += c != 0 ? 1 : 0;
  return n;
}

Space mixed_space() {
  Space space = space_of({3, 1, 2, 4, 2}, 3);
  space.predictors[1].always = true;
  space.predictors[3].always = true;
  space.max_terms = 4;
  return space;
}

}  // namespace

TEST_CASE("search: count equals enumeration", "[search][unit]") {
  for (const std::optional<std::size_t> max_terms :
       {std::optional<std::size_t>{}, std::optional<std::size_t>{0}, std::optional<std::size_t>{2},
        std::optional<std::size_t>{3}, std::optional<std::size_t>{99}}) {
    for (const bool always : {false, true}) {
      Space space = space_of({3, 1, 2, 4}, 2);
      space.max_terms = max_terms;
      space.predictors[2].always = always;
      const auto all = test::all_choices(space);
      CHECK(search::count(space) == all.size());
      std::vector<BigCount> by_terms(space.predictors.size() + 1, 0);
      for (const Choice& choice : all) ++by_terms[terms(choice)];
      CHECK(search::count_by_terms(space) == by_terms);
    }
  }
}

TEST_CASE("search: count is zero when max_terms leaves no room for what is always in", "[search][unit]") {
  Space space = space_of({2, 2, 2});
  space.predictors[0].always = space.predictors[2].always = true;
  space.max_terms = 1;
  CHECK(search::count(space) == 0);
  space.max_terms = 2;
  CHECK(search::count(space) == 4);
}

TEST_CASE("search: count is exact beyond 64 bits", "[search][unit]") {
  // 7^500 by repeated multiplication, and the sum over at most 3 terms by hand: Σ C(500,k) 6^k
  const Space space = space_of(std::vector<std::size_t>(500, 6), 2);
  BigCount power = 1;
  for (int i = 0; i < 500; ++i) power *= 7;
  CHECK(search::count(space) == 2 * power);
  Space few = space;
  few.max_terms = 3;
  CHECK(search::count(few) == 2 * (1 + 500 * 6 + 124750 * 36 + BigCount(20708500) * 216));
}

TEST_CASE("search: numbers rise with the choices and read back", "[search][property]") {
  const Space space = mixed_space();
  const auto all = test::all_choices(space);  // in rising order of (response, choices)
  REQUIRE(all.size() > 100);
  BigCount last = -1;
  for (const Choice& choice : all) {
    const BigCount number = search::number_of(space, choice);
    CHECK(number > last);
    last = number;
    CHECK(search::choice_of(space, number) == choice);
  }
}

TEST_CASE("search: every number below the radix product is a candidate or exceeds max_terms", "[search][property]") {
  const Space space = mixed_space();
  std::size_t found = 0;
  const int product = 3 * 4 * 1 * 3 * 4 * 3;
  for (int number = 0; number < product; ++number) {
    const auto choice = search::choice_of(space, number);
    if (!choice) continue;
    ++found;
    CHECK(search::number_of(space, *choice) == number);
  }
  CHECK(found == search::count(space));
  CHECK_FALSE(search::choice_of(space, product));
  CHECK_FALSE(search::choice_of(space, -1));
}

TEST_CASE("search: numbers are mixed radix with the response most significant", "[search][unit]") {
  Space space = space_of({3, 2}, 2);
  CHECK(search::number_of(space, {0, {0, 0}}) == 0);
  CHECK(search::number_of(space, {0, {0, 2}}) == 2);
  CHECK(search::number_of(space, {0, {1, 0}}) == 3);
  CHECK(search::number_of(space, {1, {0, 1}}) == 13);
  space.predictors[1].always = true;
  CHECK(search::number_of(space, {1, {3, 2}}) == 8 + 7);
}

TEST_CASE("search: a number beyond 64 bits reads back", "[search][unit]") {
  const Space space = space_of(std::vector<std::size_t>(500, 6), 3);
  Choice choice{2, std::vector<std::uint16_t>(500)};
  for (std::size_t j = 0; j < 500; ++j) choice.choice[j] = static_cast<std::uint16_t>((j * j + 3) % 7);
  const BigCount number = search::number_of(space, choice);
  CHECK(number.str().size() > 420);
  CHECK(search::choice_of(space, number) == choice);
}

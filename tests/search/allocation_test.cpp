// Counts every allocation of this program, to show that the walk makes none per candidate.
#include "problem.hpp"
#include "search/saturating.hpp"
#include "search/space_walker.hpp"

#include <catch2/catch.hpp>

#include <atomic>
#include <cstdlib>
#include <new>

// The sanitizers bring their own operators and check that they are used in pairs.
#if !defined(__SANITIZE_ADDRESS__) && !defined(__SANITIZE_THREAD__)

namespace {
std::atomic<std::size_t> n_allocations = 0;
}  // namespace

// Not inlined, since the compiler would then see memory of `new` given to `free`, and warn.
[[gnu::noinline]] void* operator new(std::size_t size) {
  ++n_allocations;
  if (void* const memory = std::malloc(size == 0 ? 1 : size)) return memory;
  throw std::bad_alloc();
}
[[gnu::noinline]] void operator delete(void* memory) noexcept { std::free(memory); }
[[gnu::noinline]] void operator delete(void* memory, std::size_t) noexcept { std::free(memory); }

using namespace formsieve;

TEST_CASE("search: the counter of allocations counts", "[search][unit]") {
  const std::size_t before = n_allocations;
  const std::vector<int> some(3);
  CHECK(n_allocations == before + 1);
  CHECK(some.size() == 3);
}

TEST_CASE("search: a walker allocates nothing while it walks", "[search][unit]") {
  const auto problem =
      test::make_problem(41, 40, {{{1, 1, 1}}, {{1, 3}}, {{1, 1}}, {{1, 1}}, {{2}, true}, {{1, 1}}}, 2, 4);
  const auto grams = test::grams_of(problem);
  search::WalkOptions options = test::keep_all(problem.space, 2.0);
  options.rules[0].keep = 20;
  options.summary_penalty.assign(30, 0.0);
  for (std::size_t k = 0; k < options.summary_penalty.size(); ++k)
    options.summary_penalty[k] = 2.0 * static_cast<double>(k);
  const search::WalkSetup setup(problem.space, grams, options, 0, 2);
  search::SpaceWalker walker(setup);
  const search::Part whole{{}, {}, true};
  walker.walk(whole, search::kCountless);  // makes what is made once: a level at a time, shapes
  const std::uint64_t scored = walker.n_scored();
  const std::size_t before = n_allocations;
  walker.walk(whole, search::kCountless);
  const std::size_t after = n_allocations;
  // per outer node at most a few (its path is copied), none per candidate
  CHECK(after - before < 40);
  CHECK(scored == search::count(problem.space).convert_to<std::uint64_t>());
  CHECK(walker.n_scored() == 2 * scored);
}

#endif

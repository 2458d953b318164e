// Counts every allocation of this program, Eigen's too, to show that Newton's method makes none once it runs.
#include "nodes.hpp"
#include "proof/dense_kernel.hpp"
#include "proof/newton.hpp"

#include <catch2/catch.hpp>

#include <atomic>
#include <cstdlib>
#include <vector>

// The sanitizers bring their own; the names are those of the GNU C library.
#if !defined(__SANITIZE_ADDRESS__) && !defined(__SANITIZE_THREAD__) && defined(__GLIBC__)

namespace {
std::atomic<std::size_t> n_allocations = 0;
}  // namespace

extern "C" {
void* __libc_malloc(std::size_t);
void* __libc_memalign(std::size_t, std::size_t);
void* malloc(std::size_t size) noexcept {
  ++n_allocations;
  return __libc_malloc(size);
}
void* aligned_alloc(std::size_t alignment, std::size_t size) noexcept {
  ++n_allocations;
  return __libc_memalign(alignment, size);
}
}

using namespace formsieve;

TEST_CASE("proof: the counter of allocations counts", "[proof][unit]") {
  const std::size_t before = n_allocations;
  const std::vector<int> some(3);
  const std::vector<proof::Line> lines(3);
  const Eigen::VectorXd numbers(3);
  CHECK(n_allocations == before + 3);
  CHECK(some.size() + lines.size() + static_cast<std::size_t>(numbers.size()) == 9);
}

TEST_CASE("proof: a Newton step allocates nothing but for the first", "[proof][unit]") {
  const proof::Reduced node = test::make_node(
      5, 60, {{{1, 1, 1}}, {{2, 1}}, {{1, 1, 3}, true}, {{1, 1}}, {{1}}, {{1, 1}}, {{2}}, {{1}}, {{1, 1}}});
  proof::Newton newton(node, test::whole_range(node, 0.7, 0.04), test::plain_start(node, 0.01, 0.02));
  REQUIRE(newton.step().usable);
  const std::size_t before = n_allocations;
  int n_usable = 0;
  for (int i = 0; i < 20; ++i) {
    const proof::Newton::Step step = newton.step();
    n_usable += step.usable;
    if (step.decrement < 3.0) newton.set_mu(0.3 * newton.mu());
  }
  const std::size_t after = n_allocations;
  CHECK(after == before);
  CHECK(n_usable == 20);
}

#endif

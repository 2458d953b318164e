// The only header behind which oneTBB stands for the other rooms.
#pragma once

#include <cstddef>
#include <functional>

namespace formsieve::base {

/// Threads that the process may use: affinity and cgroup limits respected. At least 1.
unsigned available_threads();

/// Runs body(i) for i in [0, n) on at most `threads` threads (0: available_threads()), each index exactly once, in no
/// particular order. The split into indices is the caller's and must not depend on the number of threads. Exceptions of
/// `body` are rethrown after all workers have stopped.
void parallel_for(std::size_t n, unsigned threads, const std::function<void(std::size_t)>& body);

}  // namespace formsieve::base

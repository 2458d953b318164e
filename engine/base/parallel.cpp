#include "base/parallel.hpp"

#include <tbb/global_control.h>
#include <tbb/info.h>
#include <tbb/parallel_for.h>
#include <tbb/task_arena.h>

#include <algorithm>
#include <atomic>
#include <cmath>
#include <exception>
#include <fstream>
#include <mutex>
#include <string>
#include <thread>
#include <vector>

namespace formsieve::base {

namespace {

/// Processors granted by the cgroup's CPU quota (version 2, then version 1), or a large number when there is none.
double cgroup_quota() {
  constexpr double kNoLimit = 1e9;
  if (std::ifstream file("/sys/fs/cgroup/cpu.max"); file) {
    std::string quota;
    double period = 0.0;
    if (file >> quota >> period && quota != "max" && period > 0.0) return std::stod(quota) / period;
    return kNoLimit;
  }
  std::ifstream quota_file("/sys/fs/cgroup/cpu/cpu.cfs_quota_us");
  std::ifstream period_file("/sys/fs/cgroup/cpu/cpu.cfs_period_us");
  double quota = 0.0;
  double period = 0.0;
  if (quota_file >> quota && period_file >> period && quota > 0.0 && period > 0.0) return quota / period;
  return kNoLimit;
}

}  // namespace

unsigned available_threads() {
  const int by_affinity = tbb::info::default_concurrency();
  const double by_quota = std::ceil(cgroup_quota());
  return static_cast<unsigned>(std::max(1.0, std::min<double>(by_affinity, by_quota)));
}

namespace {

#if defined(__SANITIZE_THREAD__)

/// Debian's oneTBB is not compiled for the thread sanitizer, which then takes the library's own hand-overs for races.
/// Under it plain threads do the same work, so that what is checked is our code.
void run_on(unsigned workers, std::size_t n, const std::function<void(std::size_t)>& body) {
  std::atomic<std::size_t> next{0};
  std::mutex failing;
  std::exception_ptr failure;
  const auto work = [&] {
    try {
      for (std::size_t i = next++; i < n; i = next++) body(i);
    } catch (...) {
      const std::lock_guard lock(failing);
      failure = std::current_exception();
    }
  };
  std::vector<std::thread> threads;
  for (unsigned t = 0; t < workers; ++t) threads.emplace_back(work);
  for (std::thread& thread : threads) thread.join();
  if (failure) std::rethrow_exception(failure);
}

#else

void run_on(unsigned workers, std::size_t n, const std::function<void(std::size_t)>& body) {
  // without it more threads than processors would be refused, with a warning on standard error
  const tbb::global_control allowed(tbb::global_control::max_allowed_parallelism, workers);
  tbb::task_arena arena(static_cast<int>(workers));
  arena.execute([&] {
    tbb::parallel_for(
        tbb::blocked_range<std::size_t>(0, n, 1),
        [&](const tbb::blocked_range<std::size_t>& range) {
          for (std::size_t i = range.begin(); i != range.end(); ++i) body(i);
        },
        tbb::simple_partitioner());
  });
}

#endif

}  // namespace

void parallel_for(std::size_t n, unsigned threads, const std::function<void(std::size_t)>& body) {
  const unsigned workers = threads == 0 ? available_threads() : threads;
  if (workers == 1 || n <= 1) {
    for (std::size_t i = 0; i < n; ++i) body(i);
  } else {
    run_on(workers, n, body);
  }
}

}  // namespace formsieve::base

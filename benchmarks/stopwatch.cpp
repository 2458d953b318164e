#include "stopwatch.hpp"

#include <algorithm>
#include <chrono>
#include <limits>

#include <time.h>

namespace formsieve::bench {

namespace {

double thread_now() {
  timespec now = {};
  ::clock_gettime(CLOCK_THREAD_CPUTIME_ID, &now);
  return static_cast<double>(now.tv_sec) + 1e-9 * static_cast<double>(now.tv_nsec);
}

}  // namespace

double thread_seconds(const std::function<void()>& work) {
  const double start = thread_now();
  work();
  return thread_now() - start;
}

double clock_seconds(const std::function<void()>& work) {
  const auto start = std::chrono::steady_clock::now();
  work();
  return std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count();
}

std::function<bool()> after_seconds(double seconds) {
  const auto start = std::chrono::steady_clock::now();
  return [start, seconds] {
    return std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count() >= seconds;
  };
}

double best_thread_seconds(int repeats, const std::function<void()>& work) {
  double best = std::numeric_limits<double>::infinity();
  for (int i = 0; i < repeats; ++i) best = std::min(best, thread_seconds(work));
  return best;
}

}  // namespace formsieve::bench

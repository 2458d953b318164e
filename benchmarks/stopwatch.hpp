// Time of what one thread does, and on the clock.
#pragma once

#include <functional>

namespace formsieve::bench {

/// Processor seconds that `work` takes on the calling thread: what other programs take of the machine does not count.
double thread_seconds(const std::function<void()>& work);

/// Seconds on the clock.
double clock_seconds(const std::function<void()>& work);

/// The least of `repeats` measurements of thread_seconds.
double best_thread_seconds(int repeats, const std::function<void()>& work);

}  // namespace formsieve::bench

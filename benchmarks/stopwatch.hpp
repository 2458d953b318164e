// Time of what one thread does, and on the clock.
#pragma once

#include <functional>

namespace formsieve::bench {

/// Processor seconds that `work` takes on the calling thread: what other programs take of the machine does not count.
double thread_seconds(const std::function<void()>& work);

/// Seconds on the clock.
double clock_seconds(const std::function<void()>& work);

/// True from so many seconds after the call on: a limit for what asks.
std::function<bool()> after_seconds(double seconds);

/// The least of `repeats` measurements of thread_seconds.
double best_thread_seconds(int repeats, const std::function<void()>& work);

}  // namespace formsieve::bench

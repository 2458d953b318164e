// Ctrl-C and the polite kill: the first asks the search to stop and keep what it has, the second ends the program.
#pragma once

#include <functional>
#include <stop_token>
#include <thread>

namespace formsieve::cli {

/// The exit code of a program that a second signal ended at once (128 + SIGINT, as shells count it).
inline constexpr int kQuitAtOnce = 130;

/// While it lives, the first SIGINT or SIGTERM requests a stop and calls `on_first` (on a thread of its own), the
/// second ends the process with `kQuitAtOnce`. A signal that was ignored when the program started stays ignored. One
/// object at a time.
class StopOnSignal {
 public:
  explicit StopOnSignal(std::function<void()> on_first);
  ~StopOnSignal();
  StopOnSignal(const StopOnSignal&) = delete;
  StopOnSignal& operator=(const StopOnSignal&) = delete;

  std::stop_token token() const noexcept { return source_.get_token(); }

 private:
  void watch();

  std::stop_source source_;
  std::function<void()> on_first_;
  std::thread watcher_;
};

}  // namespace formsieve::cli

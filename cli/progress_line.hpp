// One line of progress on standard error, only on a terminal and only after a second; erased when the work ends.
#pragma once

#include <formsieve/base.hpp>

#include <chrono>
#include <cstddef>
#include <mutex>
#include <string>
#include <string_view>

namespace formsieve::cli {

/// "screening  2.34 of 5.86 million candidates (40 %) · 12.3 million/s · 3 s left", with parts left
/// out, the rate first and the time left last, until it fits into `width` columns.
std::string progress_text(const Progress& progress, std::size_t width);

/// Draws and erases the line. All members may be called from any thread; messages written through it never collide
/// with the line.
class ProgressLine {
 public:
  using Clock = std::chrono::steady_clock;

  /// `shown` false: nothing is ever drawn, messages still go out.
  ProgressLine(int descriptor, bool shown, Clock::duration patience = std::chrono::seconds(1));
  ~ProgressLine();
  ProgressLine(const ProgressLine&) = delete;
  ProgressLine& operator=(const ProgressLine&) = delete;

  void update(const Progress& progress);
  void message(std::string_view text);  ///< whole lines, written above the progress line
  void erase();

 private:
  void erase_locked();
  void write_locked(std::string_view text) const;

  const int descriptor_;
  const bool shown_;
  const Clock::time_point first_drawing_;
  std::mutex mutex_;
  bool drawn_ = false;
};

}  // namespace formsieve::cli

#include "progress_line.hpp"

#include "numbers.hpp"
#include "output.hpp"
#include "terminal.hpp"

#include <algorithm>
#include <cmath>
#include <string_view>

namespace formsieve::cli {
namespace {

constexpr std::string_view kEraseLine = "\r\x1b[2K";

// "2.34 of 5.86 million": the word of scale is said once when both counts share it.
std::string amount(const Progress& progress) {
  const std::string done = rough_count(progress.done);
  if (progress.total <= 0.0) return done;
  const std::string total = rough_count(progress.total);
  constexpr std::string_view kScale = " million";
  const bool shared = done.ends_with(kScale) && total.ends_with(kScale);
  return (shared ? done.substr(0, done.size() - kScale.size()) : done) + " of " + total;
}

std::string share(const Progress& progress) {
  if (progress.total <= 0.0) return {};
  // Rounded down: "100 %" is said only of what is finished.
  const double percent = std::floor(100.0 * std::clamp(progress.done / progress.total, 0.0, 1.0));
  return " (" + std::to_string(static_cast<int>(percent)) + " %)";
}

}  // namespace

std::string progress_text(const Progress& progress, std::size_t width) {
  const std::string phase = printable(progress.phase), percent = share(progress);
  const bool counts = progress.done > 0.0 || progress.total > 0.0;
  const std::string done = counts ? "  " + amount(progress) : std::string();
  const std::string unit = counts ? " " + progress.unit : std::string();
  const std::string rate = progress.per_second > 0.0 ? " · " + rough_count(progress.per_second) + "/s" : std::string();
  const std::string left = progress.seconds_left >= 0.0 ? " · " + duration(progress.seconds_left) + " left" : "";
  for (const std::string& version : {phase + done + unit + percent + rate + left, phase + done + unit + percent + left,
                                     phase + done + percent + left, phase + percent + left, phase + percent}) {
    if (display_width(version) <= width) return version;
  }
  return truncated(phase, width);
}

ProgressLine::ProgressLine(int descriptor, bool shown, Clock::duration patience)
    : descriptor_(descriptor), shown_(shown), first_drawing_(Clock::now() + patience) {}

ProgressLine::~ProgressLine() { erase(); }

void ProgressLine::update(const Progress& progress) {
  if (!shown_ || Clock::now() < first_drawing_) return;
  // The last column stays free: writing into it wraps the line on some terminals.
  const std::size_t width = look_at(descriptor_).width - 1;
  const std::string text = progress_text(progress, width);
  const std::lock_guard lock(mutex_);
  write_locked(std::string(kEraseLine) + text);
  drawn_ = true;
}

void ProgressLine::message(std::string_view text) {
  const std::lock_guard lock(mutex_);
  erase_locked();
  write_locked(text);
}

void ProgressLine::erase() {
  const std::lock_guard lock(mutex_);
  erase_locked();
}

void ProgressLine::erase_locked() {
  if (!drawn_) return;
  write_locked(kEraseLine);
  drawn_ = false;
}

void ProgressLine::write_locked(std::string_view text) const {
  // Whoever closed standard error does not want to hear of it.
  (void)write_all(descriptor_, text);
}

}  // namespace formsieve::cli

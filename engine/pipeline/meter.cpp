#include "pipeline/meter.hpp"

namespace formsieve::pipeline {

namespace {

constexpr std::int64_t kNewsEveryMilliseconds = 200;

double seconds_since(std::chrono::steady_clock::time_point start) {
  return std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count();
}

}  // namespace

Meter::Meter(ProgressSink sink, double budget_seconds, std::stop_token outer)
    : sink_(std::move(sink)),
      budget_seconds_(budget_seconds),
      forward_(std::move(outer), [this] { source_.request_stop(); }),
      start_(std::chrono::steady_clock::now()),
      phase_start_(start_) {}

void Meter::begin(const std::string& phase, double total, const std::string& unit) {
  const std::lock_guard lock(sending_);
  phase_ = phase;
  unit_ = unit;
  total_ = total;
  done_ = 0;
  phase_start_ = std::chrono::steady_clock::now();
  next_news_ms_ = 0;
}

void Meter::rename(const std::string& phase) {
  const std::lock_guard lock(sending_);
  phase_ = phase;
}

void Meter::add(std::uint64_t units) {
  done_.fetch_add(units, std::memory_order_relaxed);
  const double elapsed = seconds();
  if (elapsed > budget_seconds_) source_.request_stop();
  const auto now_ms = static_cast<std::int64_t>(elapsed * 1000.0);
  std::int64_t due = next_news_ms_.load(std::memory_order_relaxed);
  if (now_ms < due || !next_news_ms_.compare_exchange_strong(due, now_ms + kNewsEveryMilliseconds)) return;
  send(false);
}

void Meter::end() { send(true); }

double Meter::seconds() const { return seconds_since(start_); }

void Meter::send(bool last) {
  if (!sink_) return;
  std::unique_lock lock(sending_, std::defer_lock);
  if (last)
    lock.lock();
  else if (!lock.try_lock())
    return;
  Progress news;
  news.phase = phase_;
  news.unit = unit_;
  news.done = static_cast<double>(done_.load(std::memory_order_relaxed));
  news.total = total_;
  const double elapsed = seconds_since(phase_start_);
  if (elapsed > 0.0) news.per_second = news.done / elapsed;
  if (news.per_second > 0.0 && total_ > 0.0) news.seconds_left = std::max(0.0, total_ - news.done) / news.per_second;
  sink_(news);
}

}  // namespace formsieve::pipeline

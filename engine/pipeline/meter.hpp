// The clock of a run: progress news and the budget.
#pragma once

#include <formsieve/base.hpp>

#include <atomic>
#include <chrono>
#include <cstdint>
#include <mutex>
#include <stop_token>
#include <string>

namespace formsieve::pipeline {

/// Counts units of one phase from any thread and sends news to a sink at most five times a second; asks for a stop when
/// the budget is spent.
class Meter {
 public:
  /// `budget_seconds` from construction; infinity for none. `outer` is the caller's wish to stop.
  Meter(ProgressSink sink, double budget_seconds, std::stop_token outer);

  void begin(const std::string& phase, double total, const std::string& unit);
  /// Another name for the phase, which goes on.
  void rename(const std::string& phase);
  void add(std::uint64_t units);
  /// Sends the last news of a phase.
  void end();

  std::stop_token token() const { return source_.get_token(); }
  bool stopped() const { return source_.stop_requested(); }
  double seconds() const;

 private:
  void send(bool last);

  ProgressSink sink_;
  double budget_seconds_;
  std::stop_source source_;
  std::stop_callback<std::function<void()>> forward_;
  std::chrono::steady_clock::time_point start_;
  std::chrono::steady_clock::time_point phase_start_;
  std::atomic<std::uint64_t> done_{0};
  std::atomic<std::int64_t> next_news_ms_{0};
  std::mutex sending_;
  std::string phase_, unit_;
  double total_ = 0.0;
};

}  // namespace formsieve::pipeline

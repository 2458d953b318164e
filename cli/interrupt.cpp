#include "interrupt.hpp"

#include <array>
#include <atomic>
#include <cerrno>
#include <csignal>

#include <fcntl.h>
#include <unistd.h>

namespace formsieve::cli {
namespace {

constexpr std::array<int, 2> kSignals = {SIGINT, SIGTERM};
constexpr char kSignalled = 's';
constexpr char kFinished = 'f';

// The handler may touch nothing but these: it wakes the watcher through a pipe.
std::atomic<int> signals_seen{0};
std::atomic<int> wake_descriptor{-1};
static_assert(std::atomic<int>::is_always_lock_free);

std::array<int, 2> pipe_ends = {-1, -1};
std::array<struct sigaction, 2> previous_actions{};

extern "C" void on_signal(int) {
  const int saved = errno;
  if (signals_seen.fetch_add(1) > 0) _exit(kQuitAtOnce);
  (void)!write(wake_descriptor.load(), &kSignalled, 1);
  errno = saved;
}

void install(int signal_number, struct sigaction& previous) {
  sigaction(signal_number, nullptr, &previous);
  if (previous.sa_handler == SIG_IGN) return;
  struct sigaction action {};
  action.sa_handler = on_signal;
  action.sa_flags = SA_RESTART;
  sigemptyset(&action.sa_mask);
  sigaction(signal_number, &action, nullptr);
}

}  // namespace

StopOnSignal::StopOnSignal(std::function<void()> on_first) : on_first_(std::move(on_first)) {
  if (pipe2(pipe_ends.data(), O_CLOEXEC) != 0) return;  // without a pipe Ctrl-C simply ends the program
  signals_seen = 0;
  wake_descriptor = pipe_ends[1];
  watcher_ = std::thread([this] { watch(); });
  for (std::size_t i = 0; i < kSignals.size(); ++i) install(kSignals[i], previous_actions[i]);
}

StopOnSignal::~StopOnSignal() {
  if (!watcher_.joinable()) return;
  for (std::size_t i = 0; i < kSignals.size(); ++i) sigaction(kSignals[i], &previous_actions[i], nullptr);
  (void)!write(pipe_ends[1], &kFinished, 1);
  watcher_.join();
  wake_descriptor = -1;
  close(pipe_ends[0]);
  close(pipe_ends[1]);
}

void StopOnSignal::watch() {
  for (;;) {
    char reason = kFinished;
    const ssize_t n_read = read(pipe_ends[0], &reason, 1);
    if (n_read < 0 && errno == EINTR) continue;
    if (n_read <= 0 || reason == kFinished) return;
    source_.request_stop();
    on_first_();
  }
}

}  // namespace formsieve::cli

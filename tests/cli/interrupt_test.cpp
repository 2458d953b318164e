#include "interrupt.hpp"

#include <catch2/catch.hpp>

#include <atomic>
#include <chrono>
#include <csignal>
#include <thread>

#include <sys/wait.h>
#include <unistd.h>

using namespace formsieve::cli;

namespace {

bool soon(const std::function<bool()>& happens) {
  for (int i = 0; i < 500; ++i) {
    if (happens()) return true;
    std::this_thread::sleep_for(std::chrono::milliseconds(10));
  }
  return false;
}

}  // namespace

TEST_CASE("cli: the first signal requests a stop and is announced once", "[cli][unit]") {
  for (const int signal_number : {SIGINT, SIGTERM}) {
    std::atomic<int> announced{0};
    StopOnSignal signals([&] { ++announced; });
    CHECK_FALSE(signals.token().stop_requested());
    REQUIRE(kill(getpid(), signal_number) == 0);
    CHECK(soon([&] { return announced == 1; }));
    CHECK(signals.token().stop_requested());
  }
}

TEST_CASE("cli: without a signal nothing is announced and the handlers are put back", "[cli][unit]") {
  struct sigaction before {
  }, after{};
  sigaction(SIGINT, nullptr, &before);
  std::atomic<int> announced{0};
  {
    const StopOnSignal signals([&] { ++announced; });
  }
  sigaction(SIGINT, nullptr, &after);
  CHECK(announced == 0);
  CHECK(before.sa_handler == after.sa_handler);
}

TEST_CASE("cli: the second signal ends the process at once with 130", "[cli][unit]") {
  const pid_t child = fork();
  REQUIRE(child >= 0);
  if (child == 0) {
    const StopOnSignal signals([] {});
    raise(SIGINT);
    raise(SIGINT);
    _exit(0);
  }
  int status = 0;
  REQUIRE(waitpid(child, &status, 0) == child);
  CHECK(WIFEXITED(status));
  CHECK(WEXITSTATUS(status) == kQuitAtOnce);
}

TEST_CASE("cli: a signal that was ignored stays ignored", "[cli][unit]") {
  const pid_t child = fork();
  REQUIRE(child >= 0);
  if (child == 0) {
    (void)std::signal(SIGINT, SIG_IGN);
    const StopOnSignal signals([] {});
    raise(SIGINT);
    raise(SIGINT);
    _exit(signals.token().stop_requested() ? 1 : 0);
  }
  int status = 0;
  REQUIRE(waitpid(child, &status, 0) == child);
  CHECK(WIFEXITED(status));
  CHECK(WEXITSTATUS(status) == 0);
}

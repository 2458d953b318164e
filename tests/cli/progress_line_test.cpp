#include "lines.hpp"
#include "progress_line.hpp"

#include <catch2/catch.hpp>

#include <array>

#include <unistd.h>

using namespace formsieve;
using namespace formsieve::cli;
using namespace formsieve::cli::testing;

namespace {

Progress screening() {
  Progress progress;
  progress.phase = "screening";
  progress.done = 2343750;
  progress.total = 5859375;
  progress.per_second = 12.3e6;
  progress.seconds_left = 3.2;
  progress.unit = "candidates";
  return progress;
}

// What has been written into a pipe so far.
class Pipe {
 public:
  Pipe() { REQUIRE(pipe(ends_.data()) == 0); }
  ~Pipe() {
    close(ends_[0]);
    if (ends_[1] >= 0) close(ends_[1]);
  }
  int writing() const { return ends_[1]; }
  std::string all() {
    close(ends_[1]);
    ends_[1] = -1;
    std::string text;
    std::array<char, 256> buffer{};
    for (ssize_t n = 0; (n = read(ends_[0], buffer.data(), buffer.size())) > 0;) {
      text.append(buffer.data(), static_cast<std::size_t>(n));
    }
    return text;
  }

 private:
  std::array<int, 2> ends_{};
};

}  // namespace

TEST_CASE("cli: progress says phase, amount, share, rate and time left", "[cli][unit]") {
  CHECK(progress_text(screening(), 120) ==
        "screening  2.34 of 5.86 million candidates (40 %) · 12.3 million/s · 3.2 s left");
}

TEST_CASE("cli: progress loses its lesser parts first when the screen is narrow", "[cli][unit]") {
  CHECK(progress_text(screening(), 70) == "screening  2.34 of 5.86 million candidates (40 %) · 3.2 s left");
  CHECK(progress_text(screening(), 54) == "screening  2.34 of 5.86 million (40 %) · 3.2 s left");
  CHECK(progress_text(screening(), 40) == "screening (40 %) · 3.2 s left");
  CHECK(progress_text(screening(), 20) == "screening (40 %)");
  CHECK(progress_text(screening(), 12) == "screening");
  CHECK(progress_text(screening(), 5) == "scre…");
  for (std::size_t width = 1; width < 100; ++width) CHECK(display_width(progress_text(screening(), width)) <= width);
}

TEST_CASE("cli: progress without a total gives no share, and 100 % only at the end", "[cli][unit]") {
  Progress progress = screening();
  progress.total = 0.0;
  progress.seconds_left = -1.0;
  CHECK(progress_text(progress, 120) == "screening  2.34 million candidates · 12.3 million/s");
  progress.total = 2343751;
  CHECK(has(progress_text(progress, 120), "(99 %)"));
  progress.done = progress.total;
  CHECK(has(progress_text(progress, 120), "(100 %)"));
}

TEST_CASE("cli: the line is drawn only when shown and patient enough, and is erased at the end", "[cli][unit]") {
  Pipe hidden, early, drawn;
  {
    ProgressLine line(hidden.writing(), false, std::chrono::seconds(0));
    line.update(screening());
  }
  CHECK(hidden.all().empty());
  {
    ProgressLine line(early.writing(), true, std::chrono::hours(1));
    line.update(screening());
  }
  CHECK(early.all().empty());
  {
    ProgressLine line(drawn.writing(), true, std::chrono::seconds(0));
    line.update(screening());
  }
  const std::string written = drawn.all();
  CHECK(has(written, "screening"));
  CHECK(written.ends_with("\r\x1b[2K"));
}

TEST_CASE("cli: a message is written on a cleared line", "[cli][unit]") {
  Pipe pipe;
  {
    ProgressLine line(pipe.writing(), true, std::chrono::seconds(0));
    line.message("before\n");
    line.update(screening());
    line.message("after\n");
  }
  const std::string written = pipe.all();
  CHECK(written.starts_with("before\n\r\x1b[2Kscreening"));
  CHECK(written.ends_with("\r\x1b[2Kafter\n"));
}

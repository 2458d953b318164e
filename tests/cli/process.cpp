#include "process.hpp"

#include <catch2/catch.hpp>

#include <array>
#include <csignal>
#include <filesystem>
#include <fstream>
#include <sstream>

#include <fcntl.h>
#include <poll.h>
#include <sys/wait.h>
#include <unistd.h>

extern char** environ;

namespace formsieve::cli::testing {
namespace {

using Clock = std::chrono::steady_clock;

constexpr auto kPatience = std::chrono::seconds(60);

struct Channel {
  int ours = -1, theirs = -1;
};

Channel open_pipe() {
  std::array<int, 2> ends{};
  REQUIRE(pipe2(ends.data(), O_CLOEXEC) == 0);
  return {ends[0], ends[1]};
}

Channel open_terminal() {
  const int controller = posix_openpt(O_RDWR | O_NOCTTY | O_CLOEXEC);
  REQUIRE(controller >= 0);
  REQUIRE(grantpt(controller) == 0);
  REQUIRE(unlockpt(controller) == 0);
  const int device = open(ptsname(controller), O_RDWR | O_NOCTTY | O_CLOEXEC);
  REQUIRE(device >= 0);
  return {controller, device};
}

Channel open_stream(Setting::Stream stream) {
  switch (stream) {
    case Setting::Stream::terminal:
      return open_terminal();
    case Setting::Stream::full:
      return {-1, open("/dev/full", O_WRONLY | O_CLOEXEC)};
    case Setting::Stream::closed:
      return {};
    default:
      return open_pipe();
  }
}

std::vector<std::string> environment_of(const Setting& setting) {
  std::vector<std::string> variables = setting.environment;
  for (char** entry = environ; *entry != nullptr; ++entry) {
    const std::string variable(*entry);
    const std::string name = variable.substr(0, variable.find('='));
    if (name != "COLUMNS" && name != "NO_COLOR" && name != "TERM") variables.push_back(variable);
  }
  return variables;
}

std::vector<char*> pointers(std::vector<std::string>& texts) {
  std::vector<char*> result;
  for (std::string& text : texts) result.push_back(text.data());
  result.push_back(nullptr);
  return result;
}

[[noreturn]] void become_program(std::vector<char*>& arguments, std::vector<char*>& variables, const Setting& setting,
                                 int out, int err) {
  if (!setting.folder.empty() && chdir(setting.folder.c_str()) != 0) _exit(126);
  dup2(open("/dev/null", O_RDONLY), 0);
  if (out >= 0) {
    dup2(out, 1);
  } else {
    close(1);
  }
  dup2(err, 2);
  execve(arguments.front(), arguments.data(), variables.data());
  _exit(127);
}

// Reads both streams until the program has closed them, and sends the signals that are due.
class Watcher {
 public:
  Watcher(pid_t child, Channel out, Channel err, const Setting& setting)
      : child_(child), setting_(setting), streams_{{{out.ours, POLLIN, 0}, {err.ours, POLLIN, 0}}} {}

  void watch(Outcome& outcome) {
    const Clock::time_point deadline = Clock::now() + kPatience;
    while (streams_[0].fd >= 0 || streams_[1].fd >= 0) {
      if (Clock::now() > deadline) {
        kill(child_, SIGKILL);
        FAIL("the program ran for more than a minute; standard error: " << outcome.err);
      }
      (void)poll(streams_.data(), streams_.size(), 20);
      take(0, outcome.out);
      take(1, outcome.err);
      send_signals(outcome.err);
    }
  }

 private:
  void take(std::size_t i, std::string& text) {
    if (streams_[i].fd < 0 || streams_[i].revents == 0) return;
    std::array<char, 4096> buffer{};
    const bool once = i == 0 && setting_.out == Setting::Stream::read_once;
    const ssize_t n_read = read(streams_[i].fd, buffer.data(), once ? 1 : buffer.size());
    if (n_read > 0) text.append(buffer.data(), static_cast<std::size_t>(n_read));
    if (n_read <= 0 || once) {  // a terminal that nobody holds any more gives an error
      close(streams_[i].fd);
      streams_[i].fd = -1;
    }
  }

  void send_signals(const std::string& err) {
    if (n_sent_ >= setting_.signals.size()) return;
    if (!due_) {
      if (err.find(setting_.signal_when) == std::string::npos) return;
      due_ = Clock::now() + setting_.signal_after;
    }
    if (Clock::now() < *due_) return;
    while (n_sent_ < setting_.signals.size()) kill(child_, setting_.signals[n_sent_++]);
  }

  pid_t child_;
  const Setting& setting_;
  std::array<pollfd, 2> streams_;
  std::size_t n_sent_ = 0;
  std::optional<Clock::time_point> due_;
};

}  // namespace

Outcome run_formsieve(const std::vector<std::string>& arguments, const Setting& setting) {
  std::vector<std::string> words = {FORMSIEVE_PROGRAM};
  words.insert(words.end(), arguments.begin(), arguments.end());
  std::vector<std::string> variables = environment_of(setting);
  std::vector<char*> word_pointers = pointers(words), variable_pointers = pointers(variables);
  const Channel out = open_stream(setting.out);
  const Channel err = setting.err_is_terminal ? open_terminal() : open_pipe();
  const pid_t child = fork();
  REQUIRE(child >= 0);
  if (child == 0) become_program(word_pointers, variable_pointers, setting, out.theirs, err.theirs);
  if (out.theirs >= 0) close(out.theirs);
  close(err.theirs);

  Outcome outcome;
  Watcher(child, out, err, setting).watch(outcome);
  int status = 0;
  REQUIRE(waitpid(child, &status, 0) == child);
  outcome.exit_code = WIFEXITED(status) ? WEXITSTATUS(status) : 128 + WTERMSIG(status);
  return outcome;
}

Folder::Folder() {
  std::string pattern = (std::filesystem::temp_directory_path() / "formsieve-cli-XXXXXX").string();
  REQUIRE(mkdtemp(pattern.data()) != nullptr);
  path_ = pattern;
}

Folder::~Folder() {
  std::error_code ignored;
  std::filesystem::remove_all(path_, ignored);
}

void Folder::write(const std::string& name, const std::string& text) const {
  std::ofstream(file(name), std::ios::binary) << text;
}

std::string Folder::read(const std::string& name) const {
  std::ostringstream text;
  text << std::ifstream(file(name), std::ios::binary).rdbuf();
  return text.str();
}

}  // namespace formsieve::cli::testing

// Running the real program and seeing what it did.
#pragma once

#include <chrono>
#include <optional>
#include <string>
#include <vector>

namespace formsieve::cli::testing {

/// What became of one run.
struct Outcome {
  int exit_code = -1;  ///< 128 + the signal when one ended it
  std::string out, err;
};

/// How the program is run.
struct Setting {
  std::vector<std::string> environment;  ///< "NAME=value"; COLUMNS, NO_COLOR and TERM are unset unless named here
  std::string folder;                    ///< working directory; empty: as it is
  enum class Stream { pipe, terminal, full, closed, read_once } out = Stream::pipe;  ///< standard output
  bool err_is_terminal = false;
  /// Signals sent to the program, one directly after the other, `signal_after` from the moment at which `signal_when`
  /// appears on standard error.
  std::vector<int> signals;
  std::string signal_when;
  std::chrono::milliseconds signal_after{300};
};

/// Runs the program formsieve with these arguments. A run longer than a minute is killed and fails the test.
Outcome run_formsieve(const std::vector<std::string>& arguments, const Setting& setting = {});

/// A folder for the files of one test, removed at its end.
class Folder {
 public:
  Folder();
  ~Folder();
  Folder(const Folder&) = delete;
  Folder& operator=(const Folder&) = delete;

  const std::string& path() const { return path_; }
  std::string file(const std::string& name) const { return path_ + "/" + name; }
  void write(const std::string& name, const std::string& text) const;
  std::string read(const std::string& name) const;

 private:
  std::string path_;
};

}  // namespace formsieve::cli::testing

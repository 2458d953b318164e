// What reading a plan gathers besides its settings: where each key stands, and what is wrong. Private to room run.
#pragma once

#include <formsieve/run.hpp>

#include <toml++/toml.h>

#include <map>
#include <string>
#include <vector>

namespace formsieve::run {

class Findings {
 public:
  explicit Findings(std::string path);

  /// Remembers where a key stands ("forms.always"), or an entry of its list ("forms.always.floor_area").
  void place(const std::string& key, toml::source_position at);
  /// Where a key stands; the start of the file when it was not written.
  toml::source_position place_of(const std::string& key) const;

  void refuse(toml::source_position at, std::string message, std::string hint);
  /// Refuses a key at its own place.
  void refuse_key(const std::string& key, std::string message, std::string hint);

  bool clean() const noexcept { return problems_.empty(); }
  /// The problem that stands first in the file. Only when not clean().
  Error earliest() const;

  /// "plan.toml:9:1"
  std::string where(toml::source_position at) const;
  /// Every remembered place in words.
  std::map<std::string, std::string> all_places() const;

 private:
  struct Problem {
    toml::source_position at;
    std::string message, hint;
  };
  std::string path_;
  std::map<std::string, toml::source_position> places_;
  std::vector<Problem> problems_;
};

}  // namespace formsieve::run

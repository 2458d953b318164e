// Typed reading of the values of a plan: every wrong type or value becomes a finding that names the key, the value and
// the literal setting to type. Private to room run.
#pragma once

#include "run/plan_findings.hpp"

#include <toml++/toml.h>

#include <cstddef>
#include <functional>
#include <limits>
#include <optional>
#include <string>
#include <vector>

namespace formsieve::run {

/// "a list", "a number with a decimal point", "text" …: what a value is, for messages.
std::string kind_of(const toml::node& node);

/// The value as written, shortened: "\"8 hours\"", "10.5", "a list".
std::string shown(const toml::node& node);

/// A number, whole or not; unset when the node is something else.
std::optional<double> number_in(const toml::node& node);

/// One table of a plan. The constructor refuses its unknown keys and remembers where the known ones stand. Each reading
/// function leaves `out` as it is when the key is absent or its value was refused.
class TableReader {
 public:
  TableReader(const toml::table& table, std::string name, Findings& findings);

  const toml::node* find(const std::string& key) const;
  std::string dotted(const std::string& key) const { return name_ + "." + key; }
  Findings& findings() { return findings_; }

  /// Text that is not empty.
  void text(const std::string& key, std::string& out);
  void text(const std::string& key, std::optional<std::string>& out);
  /// One of a few words.
  void choice(const std::string& key, const std::vector<std::string>& words, std::string& out);
  void choice(const std::string& key, const std::vector<std::string>& words, std::optional<std::string>& out);
  /// A list of different texts; empty ones only where they mean something.
  void texts(const std::string& key, bool empty_allowed, std::vector<std::string>& out);
  /// true or false.
  void yes_or_no(const std::string& key, bool& out);
  /// A whole number from `lowest`.
  void count(const std::string& key, std::size_t lowest, std::size_t& out);
  void count(const std::string& key, std::size_t lowest, std::optional<std::size_t>& out);
  /// A number that `accepts` says yes to; `range` says in words what it accepts, "from 0 to below 1".
  void number(const std::string& key, const std::function<bool(double)>& accepts, const std::string& range,
              double& out);
  /// An inline or headed table, one entry a column: calls `entry` for each.
  void columns(const std::string& key, const std::function<void(const std::string& column, const toml::node&)>& entry);

  /// Refuses the value of a key: "data.file is 3, and must be text".
  void refuse_value(const std::string& key, const toml::node& value, const std::string& must_be);

 private:
  std::optional<std::string> text_in(const std::string& key);
  std::optional<std::string> choice_in(const std::string& key, const std::vector<std::string>& words);
  std::optional<std::size_t> count_in(const std::string& key, std::size_t lowest);

  const toml::table& table_;
  std::string name_;
  Findings& findings_;
};

/// "write folds = 10"
std::string write_hint(const std::string& dotted_key);

}  // namespace formsieve::run

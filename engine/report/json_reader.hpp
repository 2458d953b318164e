// Reading JSON of unknown origin: every value is asked for by its type, and what does not fit is reported by its path
// in the file, "shortlist[3].cv.rmse". Private to room report.
#pragma once

#include <formsieve/base.hpp>

#include <nlohmann/json.hpp>

#include <cstddef>
#include <cstdint>
#include <limits>
#include <optional>
#include <string>
#include <vector>

namespace formsieve::report {

/// The first thing found wrong while a file was read.
class Trouble {
 public:
  explicit Trouble(std::string file) : file_(std::move(file)) {}
  void report(std::string message);
  const std::optional<Error>& first() const { return first_; }

 private:
  std::string file_;
  std::optional<Error> first_;
};

/// One value in the file and its path. A node may be absent; reading an absent node gives the value for absence and is
/// trouble only where `at` (a required key) made it.
class Node {
 public:
  Node(const nlohmann::json* value, std::string path, Trouble& trouble)
      : value_(value), path_(std::move(path)), trouble_(&trouble) {}

  bool present() const { return value_ != nullptr; }
  bool is_null() const { return value_ == nullptr || value_->is_null(); }
  bool is_list() const { return value_ != nullptr && value_->is_array(); }
  const std::string& path() const { return path_; }

  Node at(const char* key) const;   ///< a required key of an object
  Node get(const char* key) const;  ///< a key that earlier writers did not have
  std::vector<Node> items() const;  ///< the entries of a list; none when absent

  std::string text() const;
  std::string text_or_empty() const;                                                 ///< null is empty
  double number(double when_null = std::numeric_limits<double>::quiet_NaN()) const;  ///< null is `when_null`
  std::optional<double> optional_number() const;                                     ///< null is unset
  std::uint64_t count(std::uint64_t when_absent = 0) const;                          ///< a number or decimal text
  bool truth(bool when_absent = false) const;
  std::vector<std::string> texts() const;

  void report(const std::string& message) const { trouble_->report("'" + path_ + "' " + message); }

 private:
  const nlohmann::json* value_;
  std::string path_;
  Trouble* trouble_;
};

/// Parses a whole file. Errors (kind data): not JSON, with line and column; a number that no double holds.
Result<nlohmann::json> parse_json(const std::string& text, const std::string& file);

}  // namespace formsieve::report

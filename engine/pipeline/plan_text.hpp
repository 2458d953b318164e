// Writing commented TOML: values, keys, and comments that keep to a page's width.
#pragma once

#include <string>
#include <string_view>
#include <vector>

namespace formsieve::pipeline {

/// Widest line of a drafted plan, in characters.
inline constexpr std::size_t kPlanWidth = 110;

/// A TOML basic string.
std::string toml_string(std::string_view text);
/// A key as TOML takes it: bare where it may be, else quoted.
std::string toml_key(const std::string& key);
/// A one-line array of strings.
std::string toml_strings(const std::vector<std::string>& texts);

/// A value with what there is to say about it.
struct Remarked {
  std::string value;
  std::string remark;  ///< may be empty
};

/// Collects the lines of a plan. Remarks are plain sentences of any length: they are wrapped, and characters that TOML
/// forbids in comments become spaces.
class PlanText {
 public:
  void blank() { text_ += '\n'; }
  void table(const std::string& name);
  /// Lines of comment.
  void comment(const std::string& text);
  /// `key = value`, its remark beside it.
  void set(const std::string& key, const std::string& value, const std::string& remark);
  /// The same as a comment: a setting that is off, with a value that could be switched on.
  void off(const std::string& key, const std::string& value, const std::string& remark);
  /// `key = [` one value a line `]`.
  void list(const std::string& key, const std::vector<Remarked>& entries);

  const std::string& text() const noexcept { return text_; }

 private:
  void with_remark(const std::string& body, const std::string& remark, std::size_t column, const std::string& indent);

  std::string text_;
};

}  // namespace formsieve::pipeline

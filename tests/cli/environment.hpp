// An environment variable set (or unset, with a null value) for the length of a scope.
#pragma once

#include <cstdlib>
#include <optional>
#include <string>

namespace formsieve::cli::testing {

class Variable {
 public:
  Variable(const char* name, const char* value) : name_(name) {
    if (const char* before = std::getenv(name)) before_ = before;
    set(value);
  }
  ~Variable() { set(before_ ? before_->c_str() : nullptr); }
  Variable(const Variable&) = delete;
  Variable& operator=(const Variable&) = delete;

 private:
  void set(const char* value) {
    if (value == nullptr) {
      unsetenv(name_);
    } else {
      setenv(name_, value, 1);
    }
  }
  const char* name_;
  std::optional<std::string> before_;
};

}  // namespace formsieve::cli::testing

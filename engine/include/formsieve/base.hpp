// Room base: what every other room may use. Nothing here knows of tables, forms or statistics.
//
// This public header holds the error and result types that every public function returns, the version, and the events
// of a long run.
#pragma once

#include <functional>
#include <optional>
#include <string>
#include <string_view>
#include <utility>
#include <variant>

namespace formsieve {

/// The version of the library, "major.minor.patch".
const char* version() noexcept;

/// What kind of failure an Error reports; the command line derives its exit code from it.
enum class ErrorKind {
  usage,     ///< an argument or option is wrong
  plan,      ///< the plan file is wrong
  data,      ///< the table is wrong, or cannot support what was asked
  io,        ///< a file cannot be read or written
  internal,  ///< a bug of ours
};

/// An expected failure in three parts: what happened, where, and how to mend it.
struct Error {
  ErrorKind kind = ErrorKind::internal;
  std::string message;  ///< what is wrong, one sentence without a final full stop
  std::string where;    ///< file, line, column or plan key, as "plan.toml:12:3" or "coldstores.csv, line 7, column
                        ///< 'fill'"; may be empty
  std::string hint;     ///< how to mend it, with the literal setting to type where there is one; may be empty
};

/// Either a value or an Error. Returned by everything that can fail for a reason outside the program.
template <class T>
class [[nodiscard]] Result {
 public:
  Result(T value) : held_(std::in_place_index<0>, std::move(value)) {}      // NOLINT(google-explicit-constructor)
  Result(Error error) : held_(std::in_place_index<1>, std::move(error)) {}  // NOLINT(google-explicit-constructor)

  bool ok() const noexcept { return held_.index() == 0; }
  explicit operator bool() const noexcept { return ok(); }

  const T& value() const& { return std::get<0>(held_); }
  T& value() & { return std::get<0>(held_); }
  T&& value() && { return std::get<0>(std::move(held_)); }
  const T& operator*() const& { return value(); }
  T& operator*() & { return value(); }
  T&& operator*() && { return std::move(*this).value(); }
  const T* operator->() const { return &value(); }
  T* operator->() { return &value(); }

  const Error& error() const& { return std::get<1>(held_); }
  Error&& error() && { return std::get<1>(std::move(held_)); }

 private:
  std::variant<T, Error> held_;
};

/// Success without a value, or an Error.
template <>
class [[nodiscard]] Result<void> {
 public:
  Result() = default;
  Result(Error error) : error_(std::move(error)) {}  // NOLINT(google-explicit-constructor)

  bool ok() const noexcept { return !error_.has_value(); }
  explicit operator bool() const noexcept { return ok(); }
  const Error& error() const { return *error_; }

 private:
  std::optional<Error> error_;
};

using Status = Result<void>;

/// One line of news about a long run, sent at most a few times a second from one thread at a time.
struct Progress {
  std::string phase;           ///< "reading", "screening", "examining"
  double done = 0.0;           ///< units finished (candidates, rows) in this phase
  double total = 0.0;          ///< units in this phase, 0 when unknown
  double per_second = 0.0;     ///< measured rate, 0 when unknown
  double seconds_left = -1.0;  ///< estimate, negative when unknown
  std::string unit;            ///< "candidates", "rows"
};

using ProgressSink = std::function<void(const Progress&)>;

namespace base {

/// The instruction set that the kernels run with: "AVX-512", "AVX2" or "baseline".
std::string instruction_set();

/// Makes the kernels run with "baseline", "avx2" or "avx512" from now on, or with "best", the best that the processor
/// has. Not while another thread computes. Errors (kind usage): another name, a set that this processor does not have.
Status force_instruction_set(std::string_view name);

}  // namespace base

}  // namespace formsieve

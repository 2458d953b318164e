#include "run/duration.hpp"

#include <formsieve/run.hpp>

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>
#include <cstddef>
#include <string_view>

namespace formsieve::run {

namespace {

struct Unit {
  std::string_view name;
  double seconds;
};
// Longest name first among those that begin alike.
constexpr std::array<Unit, 5> kUnits{{{"min", 60.0}, {"d", 86400.0}, {"h", 3600.0}, {"m", 60.0}, {"s", 1.0}}};

Error not_a_duration(const std::string& text, const std::string& why) {
  return {ErrorKind::usage, "'" + text + "' is not a duration: " + why, "",
          "write a number and a unit, as in 8h, 90m, 45s, 1.5h, 2d or 1h30m; a number alone counts seconds"};
}

std::string_view trimmed(std::string_view text) {
  while (!text.empty() && (text.front() == ' ' || text.front() == '\t')) text.remove_prefix(1);
  while (!text.empty() && (text.back() == ' ' || text.back() == '\t')) text.remove_suffix(1);
  return text;
}

/// Takes a plain decimal number (no sign, no exponent letters beyond e) off the front; unset when there is none.
std::optional<double> take_number(std::string_view& text) {
  double value = 0.0;
  const bool starts_well = !text.empty() && ((text[0] >= '0' && text[0] <= '9') || text[0] == '.');
  if (!starts_well) return std::nullopt;
  const auto [end, code] = std::from_chars(text.data(), text.data() + text.size(), value);
  if (code != std::errc()) return std::nullopt;
  text.remove_prefix(static_cast<std::size_t>(end - text.data()));
  text = trimmed(text);
  return value;
}

const Unit* take_unit(std::string_view& text) {
  for (const Unit& unit : kUnits) {
    if (!text.starts_with(unit.name)) continue;
    text.remove_prefix(unit.name.size());
    text = trimmed(text);
    return &unit;
  }
  return nullptr;
}

}  // namespace

Result<double> parse_duration(const std::string& text) {
  std::string_view rest = trimmed(text);
  double total = 0.0;
  double last_unit_seconds = kLongestBudgetSeconds;
  bool first = true;
  do {
    const auto number = take_number(rest);
    if (!number) return not_a_duration(text, first ? "it does not begin with a number" : "a number is missing");
    if (first && rest.empty()) {
      total = *number;
      break;
    }
    const Unit* unit = take_unit(rest);
    if (unit == nullptr) return not_a_duration(text, "the units are d, h, m (or min) and s");
    if (unit->seconds >= last_unit_seconds) return not_a_duration(text, "units go from long to short, each once");
    last_unit_seconds = unit->seconds;
    total += *number * unit->seconds;
    first = false;
  } while (!rest.empty());
  if (!(total > 0.0)) return not_a_duration(text, "it must be longer than nothing");
  if (!(total <= kLongestBudgetSeconds)) return not_a_duration(text, "it is longer than ten years");
  return total;
}

std::string number_text(double value) {
  if (std::isnan(value)) return "nan";
  if (std::isinf(value)) return value > 0 ? "inf" : "-inf";
  std::array<char, 32> buffer{};
  const auto [end, code] = std::to_chars(buffer.data(), buffer.data() + buffer.size(), value);
  std::string text(buffer.data(), end);
  // A TOML integer has no negative zero and ends at 2^63: such values must stay numbers with a point.
  constexpr double kExactIntegers = 9007199254740992.0;
  const bool plain = text.find_first_of(".e") == std::string::npos;
  if (plain && ((value == 0.0 && std::signbit(value)) || std::abs(value) >= kExactIntegers)) text += ".0";
  return text;
}

std::string duration_text(double seconds) {
  constexpr double kHour = 3600.0, kMinute = 60.0;
  const auto whole = [&](double unit) { return std::fmod(seconds, unit) == 0.0 && seconds / unit < 1e6; };
  if (whole(kHour)) return number_text(seconds / kHour) + "h";
  if (whole(kMinute)) return number_text(seconds / kMinute) + "m";
  return number_text(seconds) + "s";
}

}  // namespace formsieve::run

// Small pieces that every JSON writer of this room uses. Private to room report.
#pragma once

#include <formsieve/forms.hpp>

#include <nlohmann/json.hpp>

#include <cstdint>
#include <optional>
#include <string>
#include <string_view>

namespace formsieve::report {

/// Keys stay in the order in which they are set: the files are read by people too.
using Json = nlohmann::ordered_json;

/// Whole numbers up to 2^53 are the same in every JSON reader; beyond it they are written as text.
inline constexpr std::uint64_t kLargestPlainCount = std::uint64_t{1} << 53;

/// A number, or null when it is not finite.
Json number_or_null(double value);
Json number_or_null(const std::optional<double>& value);

/// Text, or null when it is empty.
Json text_or_null(const std::string& text);

/// A number, or text beyond 2^53.
Json count_json(std::uint64_t count);

/// The items of a list, each as `writer` puts it.
template <class Items, class Writer>
Json list_json(const Items& items, Writer&& writer) {
  Json list = Json::array();
  for (const auto& item : items) list.push_back(writer(item));
  return list;
}

/// { "form", "parameter", "reflect", "shift" }, and "levels", "pooled" for level indicators.
Json form_json(const forms::Form& form);

/// The finished text, two blanks a level, a newline at the end. Bytes that are not UTF-8 become U+FFFD.
std::string json_text(const Json& json);

/// "none", "mild", "moderate", "severe"
std::string_view skew_class_name(forms::SkewClass skew);

}  // namespace formsieve::report

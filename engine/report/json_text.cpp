#include "report/json_text.hpp"

#include <cmath>

namespace formsieve::report {

namespace {

/// null, a number, or a list when there are several (design.md, "What a run folder holds").
Json parameter_json(const std::vector<double>& parameters) {
  if (parameters.empty()) return nullptr;
  if (parameters.size() == 1) return number_or_null(parameters.front());
  Json list = Json::array();
  for (const double value : parameters) list.push_back(number_or_null(value));
  return list;
}

}  // namespace

Json number_or_null(double value) { return std::isfinite(value) ? Json(value) : Json(nullptr); }

Json number_or_null(const std::optional<double>& value) { return value ? number_or_null(*value) : Json(nullptr); }

Json text_or_null(const std::string& text) { return text.empty() ? Json(nullptr) : Json(text); }

Json count_json(std::uint64_t count) { return count <= kLargestPlainCount ? Json(count) : Json(std::to_string(count)); }

Json form_json(const forms::Form& form) {
  Json json;
  json["form"] = std::string(forms::kind_name(form.kind));
  json["parameter"] = parameter_json(form.parameters);
  json["reflect"] = number_or_null(form.reflect);
  json["shift"] = number_or_null(form.shift);
  if (form.kind == forms::Kind::levels) {
    json["levels"] = form.levels;
    json["pooled"] = form.pooled;
  }
  return json;
}

std::string json_text(const Json& json) {
  constexpr int kIndent = 2;
  return json.dump(kIndent, ' ', false, Json::error_handler_t::replace) + "\n";
}

std::string_view skew_class_name(forms::SkewClass skew) {
  switch (skew) {
    case forms::SkewClass::none:
      return "none";
    case forms::SkewClass::mild:
      return "mild";
    case forms::SkewClass::moderate:
      return "moderate";
    case forms::SkewClass::severe:
      return "severe";
  }
  return "none";
}

}  // namespace formsieve::report

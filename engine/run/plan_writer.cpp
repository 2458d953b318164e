// Writing a plan: every setting, in the order of the tables, so that a run folder tells exactly what was searched.
#include <formsieve/run.hpp>

#include "run/duration.hpp"
#include "run/folder.hpp"
#include "run/plan_forms.hpp"

#include <algorithm>
#include <array>
#include <cstdio>
#include <limits>
#include <string>
#include <vector>

namespace formsieve::run {

namespace {

/// A TOML basic string.
std::string quoted(const std::string& text) {
  std::string out = "\"";
  for (const char c : text) {
    const auto byte = static_cast<unsigned char>(c);
    if (c == '"' || c == '\\') {
      out += '\\';
      out += c;
    } else if (byte < 0x20 || byte == 0x7F) {
      std::array<char, 8> escape{};
      std::snprintf(escape.data(), escape.size(), "\\u%04X", byte);
      out += escape.data();
    } else {
      out += c;
    }
  }
  return out + "\"";
}

/// A key that may stand without quotes does.
std::string key_text(const std::string& key) {
  const auto bare = [](char c) {
    return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') || c == '_' || c == '-';
  };
  return !key.empty() && std::all_of(key.begin(), key.end(), bare) ? key : quoted(key);
}

template <class Items, class Text>
std::string joined(const Items& items, Text&& text) {
  std::string out;
  for (const auto& item : items) out += (out.empty() ? "" : ", ") + text(item);
  return out;
}

template <class Items, class Text>
std::string bracketed(const Items& items, Text&& text) {
  std::string out = "[";
  return out.append(joined(items, text)).append("]");
}

std::string list_text(const std::vector<std::string>& items) { return bracketed(items, quoted); }

std::string menu_text(const std::vector<FormEntry>& menu) { return bracketed(menu, entry_text); }

/// Collects the lines of the plan.
class Lines {
 public:
  void table(const std::string& name) { text_ += "\n[" + name + "]\n"; }
  void set(const std::string& key, const std::string& value) { text_ += key + " = " + value + "\n"; }
  void set(const std::string& key, const std::optional<std::string>& value, const std::string& unset) {
    value ? set(key, quoted(*value)) : remark(key, unset);
  }
  /// A setting that is off has no value in TOML: a comment keeps it in view.
  void remark(const std::string& key, const std::string& meaning) { text_ += "# " + key + ": " + meaning + "\n"; }
  const std::string& text() const { return text_; }

 private:
  std::string text_ = std::string(kResolvedPlanHeader) + "\n";
};

void write_data(const Plan::Data& data, Lines& lines) {
  lines.table("data");
  lines.set("file", quoted(data.file));
  lines.set("query", data.query, "none");
  lines.set("response", quoted(data.response));
  lines.set("ignore", list_text(data.ignore));
  lines.set("weight", data.weight, "none");
  lines.set("group", data.group, "none");
  lines.set("order", data.order, "none");
  lines.set("fold", data.fold, "none");
  const auto bound = [](const auto& entry) {
    return key_text(entry.first) + " = [" + number_text(entry.second.first) + ", " + number_text(entry.second.second) +
           "]";
  };
  lines.set("bounds", data.bounds.empty() ? "{}" : "{ " + joined(data.bounds, bound) + " }");
  lines.set("separator", data.separator, "found out from the file");
  lines.set("decimal", data.decimal, "found out from the file");
  data.missing ? lines.set("missing", list_text(*data.missing)) : lines.remark("missing", "the usual markers");
  lines.set("text", list_text(data.text));
  lines.set("rare_levels", std::to_string(data.rare_levels));
}

void write_forms(const Plan::Forms& forms, Lines& lines) {
  const auto menu_or_survey = [](const std::optional<std::vector<FormEntry>>& menu) {
    return menu ? menu_text(*menu) : quoted("survey");
  };
  lines.table("forms");
  lines.set("response", menu_or_survey(forms.response));
  lines.set("default", menu_or_survey(forms.default_menu));
  lines.set("always", list_text(forms.always));
  const auto direction = [](const auto& entry) { return key_text(entry.first) + " = " + quoted(entry.second); };
  lines.set("direction", forms.direction.empty() ? "{}" : "{ " + joined(forms.direction, direction) + " }");
  if (forms.of.empty()) return;
  lines.table("forms.of");
  for (const auto& [column, menu] : forms.of) lines.set(key_text(column), menu_text(menu));
}

std::string seed_text(std::uint64_t seed) {
  const bool fits = seed <= static_cast<std::uint64_t>(std::numeric_limits<std::int64_t>::max());
  return fits ? std::to_string(seed) : quoted(std::to_string(seed));
}

void write_search(const Plan::Search& search, Lines& lines) {
  lines.table("search");
  lines.set("strategy", quoted(search.strategy));
  search.max_terms ? lines.set("max_terms", std::to_string(*search.max_terms)) : lines.remark("max_terms", "no limit");
  lines.set("within", number_text(search.within));
  lines.set("folds", std::to_string(search.folds));
  lines.set("repeats", std::to_string(search.repeats));
  lines.set("seed", seed_text(search.seed));
  lines.set("pool", std::to_string(search.pool));
  lines.set("budget", quoted(duration_text(search.budget_seconds)));
}

void write_rank(const Plan::Rank& rank, Lines& lines) {
  lines.table("rank");
  lines.set("by", quoted(rank.by));
  lines.set("shortlist", std::to_string(rank.shortlist));
  lines.set("near_tie", number_text(rank.near_tie));
  lines.set("require", list_text(rank.require));
  lines.set("families", rank.families ? "true" : "false");
}

std::string parameters_text(const FormEntry& entry) {
  const std::string values = joined(entry.parameters, number_text);
  if (entry.parameters.empty()) return {};
  if (entry.parameters.size() > 1) return ", powers = [" + values + "]";
  return (entry.form == kSplineForm ? ", knots = " : ", parameter = ") + values;
}

}  // namespace

std::string entry_text(const FormEntry& entry) {
  std::string rest = parameters_text(entry);
  if (entry.reflect_auto) rest += ", reflect = \"auto\"";
  if (entry.reflect) rest += ", reflect = " + number_text(*entry.reflect);
  if (entry.shift_auto) rest += ", shift = \"auto\"";
  if (entry.shift) rest += ", shift = " + number_text(*entry.shift);
  return rest.empty() ? quoted(entry.form) : "{ form = " + quoted(entry.form) + rest + " }";
}

std::string write_plan(const Plan& plan) {
  Lines lines;
  write_data(plan.data, lines);
  write_forms(plan.forms, lines);
  write_search(plan.search, lines);
  write_rank(plan.rank, lines);
  return lines.text();
}

}  // namespace formsieve::run

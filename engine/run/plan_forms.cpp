#include "run/plan_forms.hpp"

#include "run/duration.hpp"
#include "run/plan_settings.hpp"
#include "run/plan_values.hpp"

#include <algorithm>
#include <cmath>
#include <cstdint>
#include <optional>
#include <utility>

namespace formsieve::run {

namespace {

// Every form costs optimism, and a menu of hundreds can only come from two lists multiplied by mistake.
constexpr std::size_t kLargestMenu = 1000;

// Restricted cubic splines: fewer than 3 knots is a straight line, more than 5 are not offered (design.md).
constexpr std::int64_t kFewestKnots = 3, kMostKnots = 5;

const std::vector<std::string> kEntryKeys{"form", "parameter", "powers", "knots", "reflect", "shift"};
constexpr const char* kEntryHint = R"(write "ln" for a plain form, or { form = "ln", shift = 1 })";

/// "auto" or a number, as reflect and shift take.
struct Anchor {
  bool is_auto = false;
  std::optional<double> value;
};

/// Reads one inline table of a menu.
class EntryReader {
 public:
  EntryReader(const toml::table& table, const std::string& key, Findings& findings)
      : table_(table), key_(key), findings_(findings) {}

  std::vector<FormEntry> read();

 private:
  void refuse_unknown_keys();
  std::string read_form();
  std::vector<std::vector<double>> read_parameters(const std::string& form);
  std::vector<double> read_knots(const toml::node& node, const std::string& form);
  std::vector<double> read_powers(const toml::node& node, const std::string& form);
  Anchor read_anchor(const std::string& name, const toml::node& node);
  std::vector<Anchor> read_shifts();
  std::vector<double> finite_numbers(const std::string& name, const toml::node& node);
  void refuse(const toml::node& node, const std::string& what, const std::string& hint) {
    findings_.refuse(node.source().begin, key_ + ": " + what, hint);
  }

  const toml::table& table_;
  const std::string& key_;
  Findings& findings_;
};

void EntryReader::refuse_unknown_keys() {
  for (const auto& [key, node] : table_) {
    const std::string word(key.str());
    if (std::find(kEntryKeys.begin(), kEntryKeys.end(), word) != kEntryKeys.end()) continue;
    const auto near = nearest(word, kEntryKeys);
    findings_.refuse(key.source().begin, key_ + ": a form has no key '" + word + "'",
                     (near ? "did you mean '" + *near + "'? (" : "(") + std::string("a form has the keys ") +
                         comma_list(kEntryKeys) + ")");
  }
}

std::string EntryReader::read_form() {
  const toml::node* node = table_.get("form");
  if (node == nullptr) {
    findings_.refuse(table_.source().begin, key_ + ": an entry in braces needs the key 'form'", kEntryHint);
    return {};
  }
  const auto name = node->value_exact<std::string>();
  if (!name || name->empty()) {
    refuse(*node, "form is " + shown(*node) + ", and must be the name of a form", kEntryHint);
    return {};
  }
  return *name;
}

std::vector<double> EntryReader::finite_numbers(const std::string& name, const toml::node& node) {
  std::vector<double> out;
  const auto take = [&](const toml::node& item) {
    const auto value = number_in(item);
    if (value && std::isfinite(*value)) return out.push_back(*value);
    refuse(item, name + " is " + shown(item) + ", and must be a number or a list of numbers",
           "write " + name + " = 0.5, or a list to try several");
  };
  const toml::array* list = node.as_array();
  if (list == nullptr) {
    take(node);
  } else if (list->empty()) {
    refuse(node, name + " is an empty list", "give at least one number, or delete the key");
  } else {
    for (const toml::node& item : *list) take(item);
  }
  return out;
}

std::vector<double> EntryReader::read_knots(const toml::node& node, const std::string& form) {
  const auto count = node.value_exact<std::int64_t>();
  if (!count || *count < kFewestKnots || *count > kMostKnots) {
    refuse(node, "knots is " + shown(node) + ", and must be 3, 4 or 5", "write knots = 4");
  } else if (!form.empty() && form != kSplineForm) {
    refuse(node, "knots belongs to the form 'spline', not to '" + form + "'",
           R"(write { form = "spline", knots = 4 })");
  } else {
    return {static_cast<double>(*count)};
  }
  return {};
}

std::vector<double> EntryReader::read_powers(const toml::node& node, const std::string& form) {
  const toml::array* list = node.as_array();
  if (list == nullptr || list->size() != 2) {
    refuse(node, "powers must be a list of two numbers", "write powers = [0.5, 1]");
  } else if (!form.empty() && form != kFractionalPolynomialForm) {
    refuse(node, "powers belongs to the form 'fractional-polynomial', not to '" + form + "'",
           R"(write { form = "fractional-polynomial", powers = [0.5, 1] })");
  } else {
    return finite_numbers("powers", node);
  }
  return {};
}

/// One set of parameters for every form that the entry stands for.
std::vector<std::vector<double>> EntryReader::read_parameters(const std::string& form) {
  const toml::node* parameter = table_.get("parameter");
  const toml::node* powers = table_.get("powers");
  const toml::node* knots = table_.get("knots");
  const int given = (parameter != nullptr) + (powers != nullptr) + (knots != nullptr);
  if (given > 1)
    findings_.refuse(table_.source().begin, key_ + ": parameter, powers and knots exclude one another",
                     "keep the one that the form takes");
  if (knots != nullptr) return {read_knots(*knots, form)};
  if (powers != nullptr) return {read_powers(*powers, form)};
  if (parameter == nullptr) return {std::vector<double>{}};
  if (form == kSplineForm || form == kFractionalPolynomialForm)
    refuse(*parameter, "the form '" + form + "' has no parameter",
           form == kSplineForm ? "write knots = 4" : "write powers = [0.5, 1]");
  std::vector<std::vector<double>> out;
  for (const double value : finite_numbers("parameter", *parameter)) out.push_back({value});
  return out;
}

Anchor EntryReader::read_anchor(const std::string& name, const toml::node& node) {
  if (node.value_exact<std::string>() == "auto") return {true, std::nullopt};
  const auto value = number_in(node);
  if (value && std::isfinite(*value)) return {false, value};
  refuse(node, name + " is " + shown(node) + ", and must be \"auto\" or a number", "write " + name + " = \"auto\"");
  return {};
}

std::vector<Anchor> EntryReader::read_shifts() {
  const toml::node* node = table_.get("shift");
  if (node == nullptr) return {Anchor{}};
  const toml::array* list = node->as_array();
  if (list == nullptr) return {read_anchor("shift", *node)};
  if (list->empty()) refuse(*node, "shift is an empty list", "give at least one number, or delete the key");
  std::vector<Anchor> out;
  for (const toml::node& item : *list) out.push_back(read_anchor("shift", item));
  return out;
}

std::vector<FormEntry> EntryReader::read() {
  refuse_unknown_keys();
  FormEntry entry;
  entry.form = read_form();
  entry.where = findings_.where(table_.source().begin);
  if (const toml::node* node = table_.get("reflect")) {
    const Anchor reflect = read_anchor("reflect", *node);
    entry.reflect_auto = reflect.is_auto;
    entry.reflect = reflect.value;
  }
  const auto shifts = read_shifts();
  const auto parameters = read_parameters(entry.form);
  if (parameters.size() * shifts.size() > kLargestMenu) {
    findings_.refuse(table_.source().begin,
                     key_ + ": the lists multiply to " + std::to_string(parameters.size() * shifts.size()) + " forms",
                     "a menu holds at most " + std::to_string(kLargestMenu));
    return {};
  }
  std::vector<FormEntry> out;
  for (const auto& parameter : parameters) {
    for (const Anchor& shift : shifts) {
      entry.parameters = parameter;
      entry.shift_auto = shift.is_auto;
      entry.shift = shift.value;
      out.push_back(entry);
    }
  }
  return out;
}

std::vector<FormEntry> read_entry(const toml::node& item, const std::string& key, Findings& findings) {
  if (const toml::table* table = item.as_table()) return EntryReader(*table, key, findings).read();
  const auto name = item.value_exact<std::string>();
  if (name && !name->empty()) {
    FormEntry entry;
    entry.form = *name;
    entry.where = findings.where(item.source().begin);
    return {entry};
  }
  findings.refuse(item.source().begin, key + " holds " + shown(item) + ", and must be a list of forms", kEntryHint);
  return {};
}

}  // namespace

std::vector<FormEntry> read_menu(const toml::node& node, const std::string& key, Findings& findings) {
  const toml::array* list = node.as_array();
  if (list == nullptr || list->empty()) {
    findings.refuse(node.source().begin,
                    list == nullptr ? key + " is " + shown(node) + ", and must be a list of forms"
                                    : key + " is an empty list: the column could take no form",
                    R"(write a list such as ["identity", "ln"]; to leave a column out, name it in data.ignore)");
    return {};
  }
  std::vector<FormEntry> menu;
  for (const toml::node& item : *list) {
    for (FormEntry& entry : read_entry(item, key, findings)) {
      const bool twice = std::any_of(menu.begin(), menu.end(), [&](const FormEntry& e) { return same_form(e, entry); });
      if (twice && !entry.form.empty())
        findings.refuse(item.source().begin, key + " asks for " + entry_text(entry) + " twice",
                        "delete one of the two");
      menu.push_back(std::move(entry));
    }
    if (menu.size() > kLargestMenu) {
      findings.refuse(item.source().begin, key + " asks for more than " + std::to_string(kLargestMenu) + " forms",
                      "every form added costs optimism: keep those you could defend");
      break;
    }
  }
  return menu;
}

bool same_form(const FormEntry& a, const FormEntry& b) {
  return a.form == b.form && a.parameters == b.parameters && a.reflect == b.reflect &&
         a.reflect_auto == b.reflect_auto && a.shift_auto == b.shift_auto && a.shift.value_or(0) == b.shift.value_or(0);
}

}  // namespace formsieve::run

#include "run/plan_values.hpp"

#include "run/duration.hpp"
#include "run/plan_settings.hpp"

#include <algorithm>
#include <cmath>
#include <cstdint>
#include <set>
#include <utility>

namespace formsieve::run {

namespace {

// Counts are held in machine words and multiplied by rows: a larger one is a slip, not a wish.
constexpr std::int64_t kLargestCount = 1'000'000'000;

// A value in a message is a reminder, not a copy.
constexpr std::size_t kShownBytes = 40;

std::string quoted(const std::string& text) {
  std::string out = "\"";
  if (text.size() <= kShownBytes) return out.append(text).append("\"");
  std::size_t end = kShownBytes;
  while (end > 0 && (static_cast<unsigned char>(text[end]) & 0xC0u) == 0x80u) --end;  // not inside a UTF-8 sequence
  return out.append(text, 0, end).append("…\"");
}

/// A separator or decimal mark given as itself instead of by its name.
std::string spelt_out(const std::string& word) {
  if (word == ",") return "comma";
  if (word == ";") return "semicolon";
  if (word == "\t") return "tab";
  return word == "." ? "point" : word;
}

}  // namespace

std::string kind_of(const toml::node& node) {
  switch (node.type()) {
    case toml::node_type::table:
      return "a table";
    case toml::node_type::array:
      return "a list";
    case toml::node_type::string:
      return "text";
    case toml::node_type::integer:
      return "a whole number";
    case toml::node_type::floating_point:
      return "a number with a decimal point";
    case toml::node_type::boolean:
      return "true or false";
    case toml::node_type::date:
    case toml::node_type::time:
    case toml::node_type::date_time:
      return "a date or time";
    default:
      return "nothing";
  }
}

std::string shown(const toml::node& node) {
  if (const auto text = node.value_exact<std::string>()) return quoted(*text);
  if (const auto whole = node.value_exact<std::int64_t>()) return std::to_string(*whole);
  if (const auto number = node.value_exact<double>()) {
    const std::string digits = number_text(*number);
    // "10.0" must not be shown as 10 when the decimal point is what is wrong.
    return digits.find_first_not_of("-0123456789") == std::string::npos ? digits + ".0" : digits;
  }
  if (const auto truth = node.value_exact<bool>()) return *truth ? "true" : "false";
  return kind_of(node);
}

std::optional<double> number_in(const toml::node& node) {
  if (const auto whole = node.value_exact<std::int64_t>()) return static_cast<double>(*whole);
  return node.value_exact<double>();
}

std::string write_hint(const std::string& dotted_key) {
  const std::string_view example = example_of(dotted_key);
  return example.empty() ? std::string() : "write " + std::string(example);
}

TableReader::TableReader(const toml::table& table, std::string name, Findings& findings)
    : table_(table), name_(std::move(name)), findings_(findings) {
  const std::vector<std::string> known = name_.empty() ? table_names() : keys_of(name_);
  for (const auto& [key, node] : table_) {
    const std::string word(key.str());
    const std::string full = name_.empty() ? word : dotted(word);
    findings_.place(full, key.source().begin);
    if (std::find(known.begin(), known.end(), word) != known.end()) continue;
    const bool is_table = name_.empty() && node.is_table();
    findings_.refuse(key.source().begin, is_table ? "unknown table [" + word + "]" : "unknown key " + full,
                     unknown_key_hint(name_, word));
  }
}

const toml::node* TableReader::find(const std::string& key) const { return table_.get(key); }

void TableReader::refuse_value(const std::string& key, const toml::node& value, const std::string& must_be) {
  findings_.refuse(value.source().begin, dotted(key) + " is " + shown(value) + ", and must be " + must_be,
                   write_hint(dotted(key)));
}

std::optional<std::string> TableReader::text_in(const std::string& key) {
  const toml::node* node = find(key);
  if (node == nullptr) return std::nullopt;
  const auto text = node->value_exact<std::string>();
  if (text && !text->empty()) return text;
  refuse_value(key, *node, text ? "text that is not empty" : "text in quotes");
  return std::nullopt;
}

void TableReader::text(const std::string& key, std::string& out) {
  if (auto text = text_in(key)) out = std::move(*text);
}

void TableReader::text(const std::string& key, std::optional<std::string>& out) {
  if (auto text = text_in(key)) out = std::move(*text);
}

std::optional<std::string> TableReader::choice_in(const std::string& key, const std::vector<std::string>& words) {
  const toml::node* node = find(key);
  if (node == nullptr) return std::nullopt;
  const auto word = node->value_exact<std::string>();
  if (word && std::find(words.begin(), words.end(), *word) != words.end()) return word;
  const auto near = word ? nearest(spelt_out(*word), words) : std::nullopt;
  findings_.refuse(node->source().begin,
                   dotted(key) + " is " + shown(*node) + ", and must be one of " + comma_list(words),
                   "write " + key + " = \"" + near.value_or(words.front()) + "\"");
  return std::nullopt;
}

void TableReader::choice(const std::string& key, const std::vector<std::string>& words, std::string& out) {
  if (auto word = choice_in(key, words)) out = std::move(*word);
}

void TableReader::choice(const std::string& key, const std::vector<std::string>& words,
                         std::optional<std::string>& out) {
  if (auto word = choice_in(key, words)) out = std::move(*word);
}

void TableReader::yes_or_no(const std::string& key, bool& out) {
  const toml::node* node = find(key);
  if (node == nullptr) return;
  if (const auto answer = node->value_exact<bool>())
    out = *answer;
  else
    refuse_value(key, *node, "true or false");
}

void TableReader::texts(const std::string& key, bool empty_allowed, std::vector<std::string>& out) {
  const toml::node* node = find(key);
  if (node == nullptr) return;
  const toml::array* list = node->as_array();
  if (list == nullptr) return refuse_value(key, *node, "a list of texts");
  std::set<std::string> seen;
  std::vector<std::string> items;
  for (const toml::node& item : *list) {
    const auto text = item.value_exact<std::string>();
    if (!text || (text->empty() && !empty_allowed)) {
      findings_.refuse(item.source().begin, dotted(key) + " holds " + shown(item) + ", and must be a list of texts",
                       write_hint(dotted(key)));
    } else if (!seen.insert(*text).second) {
      findings_.refuse(item.source().begin, dotted(key) + " names " + quoted(*text) + " twice",
                       "delete one of the two");
    } else {
      findings_.place(dotted(key) + "." + *text, item.source().begin);
      items.push_back(*text);
    }
  }
  out = std::move(items);
}

std::optional<std::size_t> TableReader::count_in(const std::string& key, std::size_t lowest) {
  const toml::node* node = find(key);
  if (node == nullptr) return std::nullopt;
  const auto whole = node->value_exact<std::int64_t>();
  const bool fits = whole && *whole >= static_cast<std::int64_t>(lowest) && *whole <= kLargestCount;
  if (fits) return static_cast<std::size_t>(*whole);
  refuse_value(key, *node,
               whole && *whole > kLargestCount ? "at most " + std::to_string(kLargestCount)
                                               : "a whole number from " + std::to_string(lowest));
  return std::nullopt;
}

void TableReader::count(const std::string& key, std::size_t lowest, std::size_t& out) {
  if (const auto value = count_in(key, lowest)) out = *value;
}

void TableReader::count(const std::string& key, std::size_t lowest, std::optional<std::size_t>& out) {
  if (const auto value = count_in(key, lowest)) out = *value;
}

void TableReader::number(const std::string& key, const std::function<bool(double)>& accepts, const std::string& range,
                         double& out) {
  const toml::node* node = find(key);
  if (node == nullptr) return;
  const auto value = number_in(*node);
  if (!value || !accepts(*value)) return refuse_value(key, *node, "a number " + range);
  out = *value;
}

void TableReader::columns(const std::string& key,
                          const std::function<void(const std::string&, const toml::node&)>& entry) {
  const toml::node* node = find(key);
  if (node == nullptr) return;
  const toml::table* entries = node->as_table();
  if (entries == nullptr) return refuse_value(key, *node, "a table with one entry a column");
  for (const auto& [column, value] : *entries) {
    findings_.place(dotted(key) + "." + std::string(column.str()), column.source().begin);
    entry(std::string(column.str()), value);
  }
}

}  // namespace formsieve::run

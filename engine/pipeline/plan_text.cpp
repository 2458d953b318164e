#include "pipeline/plan_text.hpp"

#include <algorithm>
#include <array>
#include <cstdio>

namespace formsieve::pipeline {

namespace {

/// Column at which remarks on settings start, and the farthest that those on list entries may.
constexpr std::size_t kRemarkColumn = 34;
constexpr std::size_t kFarthestRemark = 60;

bool is_control(char c) { return static_cast<unsigned char>(c) < 0x20 || c == 0x7f; }

/// Characters, not bytes: every byte of UTF-8 but the continuations.
std::size_t width_of(std::string_view text) {
  return static_cast<std::size_t>(
      std::count_if(text.begin(), text.end(), [](char c) { return (static_cast<unsigned char>(c) & 0xc0U) != 0x80U; }));
}

/// Words of a remark.
std::vector<std::string> words_of(const std::string& text) {
  std::vector<std::string> words(1);
  for (const char c : text) {
    if (c == ' ' || is_control(c)) {
      if (!words.back().empty()) words.emplace_back();
    } else {
      words.back() += c;
    }
  }
  if (words.back().empty()) words.pop_back();
  return words;
}

/// Lines of at most `width` characters; a longer word stands alone.
std::vector<std::string> wrapped(const std::string& text, std::size_t width) {
  std::vector<std::string> lines;
  for (const std::string& word : words_of(text)) {
    if (lines.empty() || width_of(lines.back()) + 1 + width_of(word) > width)
      lines.push_back(word);
    else
      lines.back() += ' ' + word;
  }
  return lines;
}

std::string padded(const std::string& text, std::size_t width) {
  const std::size_t present = width_of(text);
  return present < width ? text + std::string(width - present, ' ') : text + "  ";
}

}  // namespace

std::string toml_string(std::string_view text) {
  std::string out = "\"";
  for (const char c : text) {
    if (is_control(c)) {
      std::array<char, 8> escape{};
      std::snprintf(escape.data(), escape.size(), "\\u%04X", static_cast<unsigned>(static_cast<unsigned char>(c)));
      out += escape.data();
      continue;
    }
    if (c == '"' || c == '\\') out += '\\';
    out += c;
  }
  out += '"';
  return out;
}

std::string toml_key(const std::string& key) {
  const auto bare = [](char c) {
    return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') || c == '_' || c == '-';
  };
  return !key.empty() && std::all_of(key.begin(), key.end(), bare) ? key : toml_string(key);
}

std::string toml_strings(const std::vector<std::string>& texts) {
  std::string out = "[";
  for (std::size_t i = 0; i < texts.size(); ++i) out.append(i == 0 ? "" : ", ").append(toml_string(texts[i]));
  return out + ']';
}

void PlanText::table(const std::string& name) { text_ += "\n[" + name + "]\n"; }

void PlanText::comment(const std::string& text) {
  for (const std::string& line : wrapped(text, kPlanWidth - 2)) text_ += "# " + line + '\n';
}

void PlanText::with_remark(const std::string& body, const std::string& remark, std::size_t column,
                           const std::string& indent) {
  const std::size_t start = std::max(column, width_of(body) + 2);
  if (start > kFarthestRemark) {  // too little room beside it
    for (const std::string& line : wrapped(remark, kPlanWidth - 2 - indent.size()))
      text_ += indent + "# " + line + '\n';
    text_ += body + '\n';
    return;
  }
  std::string left = body;
  for (const std::string& line : wrapped(remark, kPlanWidth - 2 - start)) {
    text_ += padded(left, start) + "# " + line + '\n';
    left.clear();
  }
  if (!left.empty()) text_ += left + '\n';
}

void PlanText::set(const std::string& key, const std::string& value, const std::string& remark) {
  with_remark(toml_key(key) + " = " + value, remark, kRemarkColumn, "");
}

void PlanText::off(const std::string& key, const std::string& value, const std::string& remark) {
  with_remark("# " + toml_key(key) + " = " + value, remark, kRemarkColumn, "");
}

void PlanText::list(const std::string& key, const std::vector<Remarked>& entries) {
  std::size_t column = 0;
  for (const Remarked& entry : entries) {
    const std::size_t end = width_of(entry.value) + 5;  // two before it, the comma and two after
    if (end <= kFarthestRemark) column = std::max(column, end);
  }
  text_ += toml_key(key) + " = [\n";
  for (const Remarked& entry : entries) with_remark("  " + entry.value + ',', entry.remark, column, "  ");
  text_ += "]\n";
}

}  // namespace formsieve::pipeline

#include "table/quoting.hpp"

#include "table/encoding.hpp"

#include <array>
#include <cstddef>
#include <utility>

namespace formsieve::table {

namespace {

/// Bytes of a cell that a message shows; enough for any number and most names, and still one line.
constexpr std::size_t kShownBytes = 60;

std::string hex_byte(char byte) {
  constexpr char kDigits[] = "0123456789ABCDEF";
  const auto value = static_cast<unsigned char>(byte);
  return {kDigits[value >> 4], kDigits[value & 15]};
}

bool is_control(char c) { return static_cast<unsigned char>(c) < 0x20 || c == 0x7F; }

/// Characters that look like a blank or like nothing, with the name by which they are shown.
constexpr std::array<std::pair<std::string_view, const char*>, 6> kUnseen = {{{"\u00A0", "\\u00A0"},
                                                                              {"\u2007", "\\u2007"},
                                                                              {"\u2009", "\\u2009"},
                                                                              {"\u200B", "\\u200B"},
                                                                              {"\u202F", "\\u202F"},
                                                                              {"\uFEFF", "\\uFEFF"}}};

/// One character of `text` at `at`, made visible; advances `at`.
std::string shown_character(std::string_view text, std::size_t& at) {
  const char c = text[at];
  const std::size_t length = utf8_length(text, at);
  at += length == 0 ? 1 : length;
  if (c == '\n') return "\\n";
  if (c == '\r') return "\\r";
  if (c == '\t') return "\\t";
  if (length == 0 || is_control(c)) return "\\x" + hex_byte(c);
  const std::string_view character = text.substr(at - length, length);
  for (const auto& [unseen, name] : kUnseen)
    if (character == unseen) return name;
  return std::string(character);
}

}  // namespace

std::string show(std::string_view text) {
  std::string shown = "'";
  for (std::size_t at = 0; at < text.size();) {
    if (at >= kShownBytes) {
      shown += "…";
      break;
    }
    shown += shown_character(text, at);
  }
  return shown + "'";
}

std::string toml_string(std::string_view text) {
  std::string quoted = "\"";
  for (const char c : text) {
    if (c == '"' || c == '\\') quoted += '\\';
    if (c == '\n') {
      quoted += "\\n";
    } else if (c == '\t') {
      quoted += "\\t";
    } else if (c == '\r') {
      quoted += "\\r";
    } else if (is_control(c)) {
      quoted += "\\u00" + hex_byte(c);
    } else {
      quoted += c;
    }
  }
  return quoted + "\"";
}

std::string toml_list(std::span<const std::string> texts) {
  std::string list = "[";
  for (const std::string& text : texts) {
    if (list.size() > 1) list += ", ";
    list += toml_string(text);
  }
  return list + "]";
}

std::string count(std::size_t n, std::string_view singular, std::string_view plural) {
  return std::to_string(n) + " " + std::string(n == 1 ? singular : plural);
}

}  // namespace formsieve::table

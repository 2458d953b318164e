#include "json_text.hpp"

#include "terminal.hpp"

namespace formsieve::cli {
namespace {

std::string escaped(char32_t code) {
  switch (code) {
    case '"':
      return "\\\"";
    case '\\':
      return "\\\\";
    case '\n':
      return "\\n";
    case '\r':
      return "\\r";
    case '\t':
      return "\\t";
    default:
      break;
  }
  constexpr std::string_view kHexadecimal = "0123456789abcdef";
  return std::string("\\u00") + kHexadecimal[code / 16] + kHexadecimal[code % 16];
}

}  // namespace

std::string json_text(std::string_view text) {
  std::string json = "\"";
  while (!text.empty()) {
    const Character character = next_character(text);
    if (!character.valid) {
      json += "\xEF\xBF\xBD";
    } else if (character.code < 0x20 || character.code == '"' || character.code == '\\') {
      json += escaped(character.code);
    } else {
      json += text.substr(0, character.n_bytes);
    }
    text.remove_prefix(character.n_bytes);
  }
  return json + "\"";
}

}  // namespace formsieve::cli

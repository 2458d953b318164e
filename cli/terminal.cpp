#include "terminal.hpp"

#include <algorithm>
#include <array>
#include <charconv>
#include <cstdlib>

#include <sys/ioctl.h>
#include <unistd.h>

namespace formsieve::cli {
namespace {

struct CodeRange {
  char32_t first, last;
};

// Characters of no width of their own: combining marks, joiners, variation selectors (the blocks of the Unicode
// standard, not its single characters: a missing rarity costs one column of alignment and nothing else).
constexpr std::array<CodeRange, 14> kZeroWidth = {{{0x0300, 0x036F},
                                                   {0x0483, 0x0489},
                                                   {0x0591, 0x05BD},
                                                   {0x064B, 0x065F},
                                                   {0x093C, 0x093C},
                                                   {0x0941, 0x0948},
                                                   {0x0E31, 0x0E31},
                                                   {0x0E34, 0x0E3A},
                                                   {0x1AB0, 0x1AFF},
                                                   {0x1DC0, 0x1DFF},
                                                   {0x200B, 0x200F},
                                                   {0x20D0, 0x20FF},
                                                   {0xFE00, 0xFE0F},
                                                   {0xFE20, 0xFE2F}}};

// Characters that take two columns (East Asian Width W and F, pictographs).
constexpr std::array<CodeRange, 11> kDoubleWidth = {{{0x1100, 0x115F},
                                                     {0x2E80, 0x303E},
                                                     {0x3041, 0xA4CF},
                                                     {0xA960, 0xA97F},
                                                     {0xAC00, 0xD7A3},
                                                     {0xF900, 0xFAFF},
                                                     {0xFE30, 0xFE6F},
                                                     {0xFF00, 0xFF60},
                                                     {0xFFE0, 0xFFE6},
                                                     {0x1F300, 0x1FAFF},
                                                     {0x20000, 0x3FFFD}}};

template <std::size_t N>
bool within(const std::array<CodeRange, N>& ranges, char32_t code) {
  return std::any_of(ranges.begin(), ranges.end(),
                     [code](const CodeRange& range) { return code >= range.first && code <= range.last; });
}

bool is_set(const char* name) {
  const char* value = std::getenv(name);
  return value != nullptr && *value != '\0';
}

std::size_t width_of(int descriptor) {
  if (const char* columns = std::getenv("COLUMNS")) {
    const std::string_view text(columns);
    std::size_t value = 0;
    const auto [end, error] = std::from_chars(text.data(), text.data() + text.size(), value);
    if (error == std::errc() && end == text.data() + text.size() && value > 0) {
      return std::clamp(value, kNarrowest, kWidest);
    }
  }
  winsize size{};
  if (ioctl(descriptor, TIOCGWINSZ, &size) == 0 && size.ws_col > 0) {
    return std::clamp<std::size_t>(size.ws_col, kNarrowest, kWidest);
  }
  return kDefaultWidth;
}

// C0 and C1 controls, the line and paragraph separators, and the marks that reverse the direction of writing.
bool is_control(char32_t code) {
  return code < 0x20 || (code >= 0x7F && code < 0xA0) || code == 0x2028 || code == 0x2029 ||
         (code >= 0x202A && code <= 0x202E) || (code >= 0x2066 && code <= 0x2069);
}

std::size_t expected_bytes(unsigned char lead) {
  if (lead < 0x80) return 1;
  if (lead >= 0xC2 && lead < 0xE0) return 2;
  if (lead >= 0xE0 && lead < 0xF0) return 3;
  if (lead >= 0xF0 && lead < 0xF5) return 4;
  return 0;
}

}  // namespace

Terminal look_at(int descriptor) {
  Terminal terminal;
  terminal.is_terminal = isatty(descriptor) == 1;
  const char* kind = std::getenv("TERM");
  const bool dumb = kind != nullptr && std::string_view(kind) == "dumb";
  terminal.erases = terminal.is_terminal && !dumb;
  terminal.colour = terminal.erases && !is_set("NO_COLOR");
  terminal.width = width_of(descriptor);
  return terminal;
}

std::string paint(std::string_view text, Tone tone, bool colour) {
  if (!colour || tone == Tone::plain || text.empty()) return std::string(text);
  const char* code = tone == Tone::strong ? "1" : tone == Tone::quiet ? "2" : "31";
  return "\x1b[" + std::string(code) + "m" + std::string(text) + "\x1b[0m";
}

Character next_character(std::string_view text) {
  const auto lead = static_cast<unsigned char>(text.front());
  const std::size_t n_bytes = expected_bytes(lead);
  if (n_bytes == 0 || n_bytes > text.size()) return {lead, 1, false};
  if (n_bytes == 1) return {lead, 1, true};
  char32_t code = lead & (0xFFU >> (n_bytes + 1));
  for (std::size_t i = 1; i < n_bytes; ++i) {
    const auto byte = static_cast<unsigned char>(text[i]);
    if ((byte & 0xC0U) != 0x80U) return {lead, 1, false};
    code = (code << 6U) | (byte & 0x3FU);
  }
  const bool overlong = (n_bytes == 3 && code < 0x800) || (n_bytes == 4 && code < 0x10000);
  if (overlong || code > 0x10FFFF || (code >= 0xD800 && code <= 0xDFFF)) return {lead, 1, false};
  return {code, n_bytes, true};
}

std::size_t character_width(char32_t code) {
  if (code < 0x300) return 1;
  if (within(kZeroWidth, code)) return 0;
  return within(kDoubleWidth, code) ? 2 : 1;
}

std::size_t display_width(std::string_view text) {
  std::size_t width = 0;
  while (!text.empty()) {
    const Character character = next_character(text);
    width += character.valid ? character_width(character.code) : 1;
    text.remove_prefix(character.n_bytes);
  }
  return width;
}

std::string printable(std::string_view text) {
  std::string clean;
  clean.reserve(text.size());
  while (!text.empty()) {
    const Character character = next_character(text);
    if (character.valid && !is_control(character.code)) {
      clean += text.substr(0, character.n_bytes);
    } else {
      clean += "\xEF\xBF\xBD";  // the replacement character
    }
    text.remove_prefix(character.n_bytes);
  }
  return clean;
}

std::string truncated(std::string_view text, std::size_t width) {
  if (display_width(text) <= width) return std::string(text);
  if (width == 0) return {};
  std::size_t taken = 0, used = 0;
  while (taken < text.size()) {
    const Character character = next_character(text.substr(taken));
    const std::size_t next = character.valid ? character_width(character.code) : 1;
    if (used + next > width - 1) break;
    used += next;
    taken += character.n_bytes;
  }
  return std::string(text.substr(0, taken)) + "…";
}

std::string padded_right(std::string_view text, std::size_t width) {
  const std::size_t used = display_width(text);
  return std::string(text) + std::string(used < width ? width - used : 0, ' ');
}

std::string padded_left(std::string_view text, std::size_t width) {
  const std::size_t used = display_width(text);
  return std::string(used < width ? width - used : 0, ' ') + std::string(text);
}

}  // namespace formsieve::cli

#include "page.hpp"

#include "wrapping.hpp"

#include <algorithm>

namespace formsieve::cli {
namespace {

// Longer lines of prose are hard to follow, however wide the screen.
constexpr std::size_t kWidestProse = 96;
// A text that hangs beside its label needs this much room; otherwise it goes under it.
constexpr std::size_t kNarrowestHanging = 24;
constexpr std::string_view kIndent = "  ";

}  // namespace

std::size_t Page::prose_width() const noexcept { return std::min(terminal_.width, kWidestProse); }

void Page::blank() {
  if (!text_.empty() && !text_.ends_with("\n\n")) text_ += "\n";
}

void Page::heading(std::string_view text) {
  blank();
  for (const std::string& line : wrapped(text, prose_width())) {
    text_ += paint(line, Tone::strong, terminal_.colour) + "\n";
  }
}

void Page::prose(std::string_view text) { text_ += indented(wrapped(text, prose_width()), "", ""); }

void Page::note(std::string_view text) { text_ += indented(wrapped(text, prose_width() - 2), "– ", "  "); }

void Page::equation(std::string_view equation) {
  const std::string hanging = std::string(kIndent) + "    ";
  const std::size_t room = terminal_.width - std::min(terminal_.width - 1, hanging.size());
  text_ += indented(wrapped_equation(equation, room), kIndent, hanging);
}

void Page::labelled(std::string_view label, std::size_t label_width, std::string_view text, Tone label_tone) {
  const std::string clean = printable(label);
  const std::size_t room = prose_width();
  const std::size_t hanging = kIndent.size() + std::max(label_width, display_width(clean)) + kIndent.size();
  if (hanging + kNarrowestHanging <= room) {
    const std::string space(hanging - kIndent.size() - display_width(clean), ' ');
    const std::string first = std::string(kIndent) + paint(clean, label_tone, terminal_.colour) + space;
    text_ += indented(wrapped(text, room - hanging), first, std::string(hanging, ' '));
    return;
  }
  text_ += std::string(kIndent) + paint(clean, label_tone, terminal_.colour) + "\n";
  text_ += indented(wrapped(text, room - 4), "    ", "    ");
}

void Page::command(std::string_view line) { text_ += std::string(kIndent) + printable(line) + "\n"; }

void Page::table(const TextTable& table) { text_ += table.draw(terminal_.width, terminal_.colour); }

std::string held_together(std::string_view text) {
  std::string held;
  for (const char letter : text) held += letter == ' ' ? std::string("\xC2\xA0") : std::string(1, letter);
  return held;
}

std::string joined(const std::vector<std::string>& words, std::string_view separator) {
  std::string text;
  for (std::size_t i = 0; i < words.size(); ++i) {
    if (i > 0) text += separator;
    text += words[i];
  }
  return text;
}

std::string listed(const std::vector<std::string>& words) {
  if (words.size() < 2) return joined(words, "");
  const std::vector<std::string> head(words.begin(), words.end() - 1);
  return joined(head, ", ") + " and " + words.back();
}

}  // namespace formsieve::cli

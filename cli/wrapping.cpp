#include "wrapping.hpp"

#include "terminal.hpp"

#include <algorithm>

namespace formsieve::cli {
namespace {

constexpr std::string_view kNoBreakSpace = "\xC2\xA0";

std::vector<std::string> split_at_spaces(std::string_view text) {
  std::vector<std::string> words;
  std::string word;
  for (const char letter : text) {
    if (letter == ' ' || letter == '\n') {
      if (!word.empty()) words.push_back(std::move(word));
      word.clear();
    } else {
      word += letter;
    }
  }
  if (!word.empty()) words.push_back(std::move(word));
  return words;
}

std::string replaced(std::string_view text, std::string_view what, std::string_view by) {
  std::string result;
  for (std::size_t at = text.find(what); at != std::string_view::npos; at = text.find(what)) {
    result.append(text.substr(0, at)).append(by);
    text.remove_prefix(at + what.size());
  }
  return result.append(text);
}

std::string with_plain_spaces(std::string_view text) { return replaced(text, kNoBreakSpace, " "); }

// The longest prefix of at least one character that fits.
std::size_t bytes_that_fit(std::string_view word, std::size_t width) {
  std::size_t taken = 0, used = 0;
  while (taken < word.size()) {
    const Character character = next_character(word.substr(taken));
    const std::size_t next = character.valid ? character_width(character.code) : 1;
    if (used + next > width && taken > 0) break;
    used += next;
    taken += character.n_bytes;
  }
  return taken;
}

std::vector<std::string> filled(const std::vector<std::string>& words, std::size_t width) {
  std::vector<std::string> lines;
  std::string line;
  const auto end_line = [&] {
    if (!line.empty()) lines.push_back(with_plain_spaces(line));
    line.clear();
  };
  for (std::string_view word : words) {
    if (!line.empty() && display_width(line) + 1 + display_width(word) > width) end_line();
    while (line.empty() && display_width(word) > width) {
      const std::size_t n_bytes = bytes_that_fit(word, width);
      lines.push_back(with_plain_spaces(word.substr(0, n_bytes)));
      word.remove_prefix(n_bytes);
    }
    if (word.empty()) continue;
    if (!line.empty()) line += ' ';
    line += word;
  }
  end_line();
  if (lines.empty()) lines.emplace_back();
  return lines;
}

bool starts_with_operator(std::string_view rest) {
  return rest.starts_with("+ ") || rest.starts_with("− ") || rest.starts_with("- ") || rest.starts_with("· ");
}

// The pieces of a sum that lie `depth` brackets deep: "1.03 · exp(3.2", "+ 0.84·ln(x)", "− 0.1·y)".
std::vector<std::string> pieces_at(std::string_view text, int depth) {
  std::vector<std::string> pieces(1);
  int open = 0;
  for (std::size_t i = 0; i < text.size(); ++i) {
    if (text[i] == '(' || text[i] == '[') ++open;
    if (text[i] == ')' || text[i] == ']') open = std::max(0, open - 1);
    const bool after_equals = i > 0 && text[i - 1] == '=';
    if (text[i] == ' ' && open <= depth && (after_equals || starts_with_operator(text.substr(i + 1)))) {
      pieces.emplace_back();
    } else {
      pieces.back() += text[i];
    }
  }
  return pieces;
}

// Deeper brackets than this do not occur in what is printed here; beyond it a long piece is broken at its spaces.
constexpr int kDeepest = 3;

std::vector<std::string> breakable(std::string_view text, std::size_t width, int depth) {
  std::vector<std::string> parts;
  for (const std::string& piece : pieces_at(text, depth)) {
    if (display_width(piece) <= width) {
      parts.push_back(replaced(piece, " ", kNoBreakSpace));
    } else if (depth < kDeepest) {
      const std::vector<std::string> smaller = breakable(piece, width, depth + 1);
      parts.insert(parts.end(), smaller.begin(), smaller.end());
    } else {
      const std::vector<std::string> words = split_at_spaces(piece);
      parts.insert(parts.end(), words.begin(), words.end());
    }
  }
  return parts;
}

}  // namespace

std::vector<std::string> wrapped(std::string_view text, std::size_t width) {
  return filled(split_at_spaces(printable(text)), std::max<std::size_t>(width, 1));
}

std::vector<std::string> wrapped_equation(std::string_view equation, std::size_t width) {
  width = std::max<std::size_t>(width, 1);
  return filled(breakable(printable(equation), width, 0), width);
}

std::string indented(const std::vector<std::string>& lines, std::string_view first, std::string_view hanging) {
  std::string text;
  for (std::size_t i = 0; i < lines.size(); ++i) {
    text += i == 0 ? first : hanging;
    text += lines[i];
    text += '\n';
  }
  return text;
}

}  // namespace formsieve::cli

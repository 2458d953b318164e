// The nearest known name, for messages about a likely slip of the keyboard.
#include <formsieve/run.hpp>

#include <algorithm>
#include <cstddef>

namespace formsieve::run {

namespace {

// A slip seldom touches more than a third of a word; beyond that a suggestion would be a guess.
constexpr std::size_t kLettersPerSlip = 3;

/// Code points of UTF-8 text, ASCII letters lowered and '_' and ' ' taken as '-', so that case and joining marks cost
/// nothing. Bytes that are not UTF-8 stand for themselves.
std::u32string folded(const std::string& text) {
  std::u32string out;
  for (std::size_t i = 0; i < text.size();) {
    const auto byte = static_cast<unsigned char>(text[i]);
    const std::size_t length = byte < 0xC0 ? 1 : byte < 0xE0 ? 2 : byte < 0xF0 ? 3 : 4;
    char32_t point = length == 1 ? byte : byte & (0x7Fu >> length);
    for (std::size_t k = 1; k < length && i + k < text.size(); ++k)
      point = (point << 6) | (static_cast<unsigned char>(text[i + k]) & 0x3Fu);
    if (point >= U'A' && point <= U'Z') point += U'a' - U'A';
    if (point == U'_' || point == U' ') point = U'-';
    out.push_back(point);
    i += length;
  }
  return out;
}

/// Edit distance with transposition of neighbours (Damerau 1964, Levenshtein 1966; optimal string alignment).
/// Cost O(|a|·|b|).
std::size_t edit_distance(const std::u32string& a, const std::u32string& b) {
  std::vector<std::size_t> before_last(b.size() + 1), last(b.size() + 1), row(b.size() + 1);
  for (std::size_t j = 0; j <= b.size(); ++j) last[j] = j;
  for (std::size_t i = 1; i <= a.size(); ++i) {
    row[0] = i;
    for (std::size_t j = 1; j <= b.size(); ++j) {
      const std::size_t substitution = last[j - 1] + (a[i - 1] == b[j - 1] ? 0 : 1);
      row[j] = std::min({last[j] + 1, row[j - 1] + 1, substitution});
      const bool swapped = i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1];
      if (swapped) row[j] = std::min(row[j], before_last[j - 2] + 1);
    }
    before_last.swap(last);
    last.swap(row);
  }
  return last[b.size()];
}

}  // namespace

std::optional<std::string> nearest(const std::string& name, const std::vector<std::string>& known) {
  const std::u32string wanted = folded(name);
  std::optional<std::string> best;
  std::size_t best_distance = 0;
  for (const std::string& candidate : known) {
    const std::u32string other = folded(candidate);
    const std::size_t longer = std::max(wanted.size(), other.size());
    const std::size_t shorter = std::min(wanted.size(), other.size());
    const std::size_t allowed = std::max<std::size_t>(1, longer / kLettersPerSlip);
    if (longer - shorter > allowed) continue;
    const std::size_t distance = edit_distance(wanted, other);
    // A one-letter word differs from every other by one letter: that says nothing.
    if (distance > allowed || (distance > 0 && distance >= longer)) continue;
    if (!best || distance < best_distance) {
      best = candidate;
      best_distance = distance;
    }
  }
  return best;
}

}  // namespace formsieve::run

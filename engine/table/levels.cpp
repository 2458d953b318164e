#include "table/levels.hpp"

#include <cstring>

namespace formsieve::table {

namespace {

constexpr std::size_t kFirstSlots = 16;

/// A multiply-and-fold hash of eight bytes at a time; quality matters only for speed, since codes follow appearance.
std::uint32_t hash_of(std::string_view text) {
  constexpr std::uint64_t kOdd = 0x9E3779B97F4A7C15U;  // 2^64 / golden ratio, the usual odd multiplier
  std::uint64_t hash = text.size() * kOdd;
  const auto fold = [&hash](std::uint64_t word) {
    hash = (hash ^ word) * kOdd;
    hash ^= hash >> 29U;
  };
  std::size_t at = 0;
  for (; at + 8 <= text.size(); at += 8) {
    std::uint64_t word = 0;
    std::memcpy(&word, text.data() + at, 8);
    fold(word);
  }
  std::uint64_t tail = 0;
  if (at < text.size()) std::memcpy(&tail, text.data() + at, text.size() - at);
  fold(tail);
  return static_cast<std::uint32_t>(hash >> 32U);
}

}  // namespace

std::uint32_t LevelIndex::add(std::string_view text, bool lasting, std::size_t row) {
  const std::uint32_t code = find_or_insert(text, lasting, row);
  ++levels_[code].count;
  return code;
}

std::uint32_t LevelIndex::merge(const Level& level) {
  const std::uint32_t code = find_or_insert(level.text, true, level.first_row);
  levels_[code].count += level.count;
  return code;
}

std::uint32_t LevelIndex::find_or_insert(std::string_view text, bool lasting, std::size_t row) {
  if (2 * levels_.size() >= slots_.size()) grow();
  const std::uint32_t hash = hash_of(text);
  const std::size_t mask = slots_.size() - 1;
  std::size_t at = hash & mask;
  for (; slots_[at].code_plus_one != 0; at = (at + 1) & mask) {
    const Slot& slot = slots_[at];
    if (slot.hash == hash && levels_[slot.code_plus_one - 1].text == text) return slot.code_plus_one - 1;
  }
  if (!lasting) text = copies_.emplace_front(text);
  levels_.push_back({text, 0, row});
  slots_[at] = {hash, static_cast<std::uint32_t>(levels_.size())};
  return static_cast<std::uint32_t>(levels_.size() - 1);
}

void LevelIndex::grow() {
  std::vector<Slot> old = std::move(slots_);
  slots_.assign(old.empty() ? kFirstSlots : 2 * old.size(), Slot{0, 0});
  const std::size_t mask = slots_.size() - 1;
  for (const Slot& slot : old) {
    if (slot.code_plus_one == 0) continue;
    std::size_t at = slot.hash & mask;
    while (slots_[at].code_plus_one != 0) at = (at + 1) & mask;
    slots_[at] = slot;
  }
}

}  // namespace formsieve::table

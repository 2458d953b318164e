// The distinct texts of a column, numbered in order of first appearance.
#pragma once

#include <cstddef>
#include <cstdint>
#include <forward_list>
#include <span>
#include <string>
#include <string_view>
#include <vector>

namespace formsieve::table {

/// A growing set of texts with codes 0, 1, 2, …, counts and first rows. Texts that last as long as the set are held as
/// views, others are copied.
class LevelIndex {
 public:
  LevelIndex() = default;
  LevelIndex(LevelIndex&&) = default;  // a copy would view the copies of its original
  LevelIndex& operator=(LevelIndex&&) = default;

  struct Level {
    std::string_view text;
    std::uint64_t count;
    std::size_t first_row;
  };

  /// Counts one occurrence of `text` in `row` and returns its code. `lasting`: the bytes outlive this set. Cost:
  /// O(length).
  std::uint32_t add(std::string_view text, bool lasting, std::size_t row);

  /// Takes over one level of another set, which must outlive this one; returns its code here.
  std::uint32_t merge(const Level& level);

  std::span<const Level> levels() const noexcept { return levels_; }
  bool empty() const noexcept { return levels_.empty(); }

 private:
  struct Slot {
    std::uint32_t hash;
    std::uint32_t code_plus_one;  ///< 0: free
  };

  std::uint32_t find_or_insert(std::string_view text, bool lasting, std::size_t row);
  void grow();

  std::vector<Level> levels_;
  std::vector<Slot> slots_;                ///< open addressing, a power of two, at most half full
  std::forward_list<std::string> copies_;  ///< a list, so that views of its strings stay valid
};

}  // namespace formsieve::table

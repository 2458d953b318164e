// The cells that mean "no value".
#pragma once

#include <array>
#include <span>
#include <string>
#include <string_view>
#include <vector>

namespace formsieve::table {

/// A set of missing markers, compared as written.
class MissingMarkers {
 public:
  /// `decimal` tells which markers are numbers ("-999").
  MissingMarkers(std::span<const std::string> markers, char decimal);

  bool contains(std::string_view cell) const noexcept {
    if (!cell.empty() && !is_first_[static_cast<unsigned char>(cell.front())]) return false;  // nearly always
    for (const std::string& marker : markers_)
      if (marker == cell) return true;
    return false;
  }

  /// Whether a cell that is a number can be a marker at all.
  bool has_numbers() const noexcept { return has_numbers_; }

 private:
  std::vector<std::string> markers_;
  std::array<bool, 256> is_first_ = {};  ///< bytes with which some marker begins
  bool has_numbers_ = false;
};

}  // namespace formsieve::table

// The cells that mean "no value".
#pragma once

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
    for (const std::string& marker : markers_)
      if (marker == cell) return true;
    return false;
  }

  /// Whether a cell that is a number can be a marker at all.
  bool has_numbers() const noexcept { return has_numbers_; }

 private:
  std::vector<std::string> markers_;
  bool has_numbers_ = false;
};

}  // namespace formsieve::table

#include "table/missing.hpp"

#include "table/number.hpp"

#include <algorithm>

namespace formsieve::table {

MissingMarkers::MissingMarkers(std::span<const std::string> markers, char decimal)
    : markers_(markers.begin(), markers.end()),
      has_numbers_(std::any_of(markers.begin(), markers.end(), [decimal](const std::string& marker) {
        return parse_number(marker, decimal).has_value();
      })) {
  for (const std::string& marker : markers_)
    if (!marker.empty()) is_first_[static_cast<unsigned char>(marker.front())] = true;
}

}  // namespace formsieve::table

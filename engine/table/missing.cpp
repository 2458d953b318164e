#include "table/missing.hpp"

#include "table/number.hpp"

#include <algorithm>

namespace formsieve::table {

MissingMarkers::MissingMarkers(std::span<const std::string> markers, char decimal)
    : markers_(markers.begin(), markers.end()),
      has_numbers_(std::any_of(markers.begin(), markers.end(), [decimal](const std::string& marker) {
        return parse_number(marker, decimal).has_value();
      })) {}

}  // namespace formsieve::table

// Numbers and names in sentences.
#pragma once

#include <optional>
#include <string>
#include <vector>

namespace formsieve::survey {

/// A number for reading: all its digits when they are few, else six significant ones; "−" before negatives.
std::string readable(double x);

/// A number of moderate size for reading, with so many decimals.
std::string rounded(double x, int decimals);

/// A number to be typed into a setting: the fewest digits that read back the same double.
std::string literal(double x);

/// Names in single quotes, at most `most` of them: "'a', 'b' and 3 more".
std::string listed(const std::vector<std::string>& names, std::size_t most);

/// The known name with the fewest edits to `name` (Levenshtein 1966), if few enough for a likely slip: at most a third
/// of its characters, and always one. Ties go to the earliest.
std::optional<std::string> nearest_name(const std::string& name, const std::vector<std::string>& known);

}  // namespace formsieve::survey

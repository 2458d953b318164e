// Numbers and phrases for the sentences of the checks.
#pragma once

#include <cstddef>
#include <span>
#include <string>

namespace formsieve::checks {

/// `value` for reading: three significant digits, "−0.0123", "4.56", "12345" (whole from 1,000 to 10 million).
std::string number_words(double value);

/// "line 19" for the row with index 17, or "row 18 of the rows in use" where `lines` does not reach it.
std::string row_words(std::span<const std::size_t> lines, std::size_t row);

}  // namespace formsieve::checks

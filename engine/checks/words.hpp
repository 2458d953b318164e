// Numbers and phrases for the sentences of the checks.
#pragma once

#include <string>

namespace formsieve::checks {

/// `value` for reading: three significant digits, "−0.0123", "4.56", "12345" (whole from 1,000 to 10 million).
std::string number_words(double value);

/// "row 18 of the rows in use" for the row with index 17.
std::string row_words(long row_index);

}  // namespace formsieve::checks

// Numbers and phrases for the sentences of the judge.
#pragma once

#include <cstddef>
#include <string>
#include <string_view>

namespace formsieve::judge {

/// Three significant digits, "−0.0123", "4.56", "1,235" (whole and grouped from 1,000 to 10 million).
std::string number_words(double value);

/// The fewest digits that read back, "100.5": for edges that new rows are held to.
std::string exact_words(double value);

/// A share as a percentage with two significant digits, "0.84 %", "12 %".
std::string percent_words(double share);

/// Digits in groups of three: "1234567" → "1,234,567"; a count that nobody can read, of more than kMostGroupedDigits
/// digits, as its first three and a power: "1.22·10^349".
inline constexpr std::size_t kMostGroupedDigits = 18;
std::string grouped_digits(std::string_view digits);

/// "1 candidate", "2,000 candidates".
std::string counted(std::size_t count, const std::string& noun);

/// The first letter in upper case (ASCII).
std::string capitalised(std::string sentence);

}  // namespace formsieve::judge

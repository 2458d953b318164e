// Numbers for reading: significant digits, thousands separators, durations. The machine's digits are in the JSON.
#pragma once

#include <cstddef>
#include <string>
#include <string_view>

namespace formsieve::cli {

/// "1234567890" as "1,234,567,890", beyond 18 digits as "1.22·10^349"; a leading sign is kept, anything else returned
/// as it is.
std::string grouped(std::string_view digits);
std::string grouped(std::size_t count);

/// About `digits` significant digits, whole numbers below ten million in full, trailing zeros dropped, thousands
/// separated, a true minus sign; "1.23e8" where a plain figure would be long; "undefined" when not finite.
std::string significant(double value, int digits = 4);

/// Exactly `decimals` decimals, thousands separated; as `significant` where that would be longer than 15 characters.
std::string with_decimals(double value, int decimals);

/// Decimals that show `digits` significant digits of the value; 0 for zero and whatever is not finite.
int decimals_for(double value, int digits);

/// "0.8 s", "12 s", "2 min 10 s", "3 h 20 min", "2 days 4 h".
std::string duration(double seconds);

/// "1 row", "420 rows", "0 rows"; the plural adds an s unless given.
std::string counted(std::size_t count, std::string_view singular, std::string_view plural = {});

/// A large count in three digits and a word: "5.86 million"; below ten thousand in full.
std::string rough_count(double count);

/// p-values: three decimals, "below 0.001" beyond.
std::string p_value(double p);

}  // namespace formsieve::cli

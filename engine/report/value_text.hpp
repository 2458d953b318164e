// Numbers and cells of long result files, written fast.
#pragma once

#include <string>
#include <string_view>

namespace formsieve::report {

/// Significant digits of a scored value: far more than any prediction has, and half of what a double needs.
inline constexpr int kValueDigits = 10;
/// Room that write_value needs.
inline constexpr int kValueBytes = 32;

/// Writes a finite value with kValueDigits significant digits, without zeros at the end, as both CSV and JSON read it:
/// "1234.5", "0.00012", "1.5e+20". Returns the position after it. Where the digits that are dropped are within 1e-15 of
/// a half, either neighbour may be written.
char* write_value(char* at, double value);

/// Adds a text as a CSV cell (RFC 4180), in quotes only where it needs them.
void append_cell(std::string& text, std::string_view cell);
/// Adds a text as a JSON string.
void append_json_string(std::string& text, std::string_view cell);

}  // namespace formsieve::report

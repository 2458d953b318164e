// Numbers and phrases for the sentences of the room.
#pragma once

#include <string>

namespace formsieve::backtransform {

/// Significant digits, with three "−0.0123", "4.56", "1,235" (whole and grouped from 1,000 to 10 million).
std::string number_words(double value, int significant = 3);

/// Two numbers with as many digits, from three, as tell them apart.
struct NumberPair {
  std::string first, second;
};
NumberPair pair_words(double first, double second);

/// The ends of an interval, with the decimals that give the larger three digits: "2.70", "3.04"; "−14.3", "0.2".
NumberPair range_words(double low, double high);

/// A share as a percentage with two significant digits, "0.84 %", "12 %".
std::string percent_words(double share);

}  // namespace formsieve::backtransform

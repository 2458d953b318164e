// Small pieces of text that labels and messages share.
#pragma once

#include <string>
#include <string_view>
#include <vector>

namespace formsieve::forms {

/// Fewest digits that read back, with a true minus sign (U+2212); plain digits between 1e-5 and 1e15.
std::string number_text(double value);
/// The same with an ASCII hyphen, as a plan is written.
std::string plan_number(double value);

/// The one of `known` with the fewest single-letter edits to `word`; empty when none is near.
std::string_view nearest(std::string_view word, const std::vector<std::string_view>& known);

}  // namespace formsieve::forms

// A small reader of printed formulas, independent of the forms: labels are evaluated again from their text alone.
#pragma once

#include <map>
#include <string>

namespace formsieve::forms::tests {

/// Value of a formula in which names stand for numbers, in extended precision. Knows + − · / ^ ² ³ √ ∛, parentheses and
/// ln log10 exp asinh sinh logit sin arcsin, and the named families YJ(u; λ), YJ⁻¹(z; λ), splinej(u; knots). Throws
/// std::runtime_error on what it cannot read to the end.
long double value_of(const std::string& formula, const std::map<std::string, long double>& names);

}  // namespace formsieve::forms::tests

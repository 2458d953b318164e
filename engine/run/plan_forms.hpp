// Menus as a plan writes them: a form's name alone, or an inline table with its parameters; lists of parameters and
// shifts are spread into one entry each. Private to room run.
#pragma once

#include "run/plan_findings.hpp"

#include <toml++/toml.h>

#include <string>
#include <string_view>
#include <vector>

namespace formsieve::run {

/// Keys of the two forms whose parameter has a name of its own.
inline constexpr std::string_view kSplineForm = "spline";
inline constexpr std::string_view kFractionalPolynomialForm = "fractional-polynomial";

/// Reads one menu. What is wrong goes to `findings`; the entries that could be read are returned. `key` is the menu's
/// name in messages, "forms.of.rain".
std::vector<FormEntry> read_menu(const toml::node& node, const std::string& key, Findings& findings);

/// "rain" for a plain form, otherwise the inline table, as a plan writes it.
std::string entry_text(const FormEntry& entry);

/// True when both ask for the same form: an absent shift is a shift of 0.
bool same_form(const FormEntry& a, const FormEntry& b);

}  // namespace formsieve::run

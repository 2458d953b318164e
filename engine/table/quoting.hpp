// Texts from tables as they are shown in messages and typed in plans.
#pragma once

#include <span>
#include <string>
#include <string_view>

namespace formsieve::table {

/// A cell for a sentence: in single quotes, control and broken characters written as \n, \t or \xNN, cut after
/// 60 bytes.
std::string show(std::string_view text);

/// A TOML basic string (TOML 1.0, section "String"): the text in double quotes, escaped where needed.
std::string toml_string(std::string_view text);

/// A TOML array of strings: ["", "NA"].
std::string toml_list(std::span<const std::string> texts);

/// "1 row", "3 rows".
std::string count(std::size_t n, std::string_view singular, std::string_view plural);

}  // namespace formsieve::table

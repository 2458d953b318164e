// A string as JSON, for the one result that is nothing but text.
#pragma once

#include <string>
#include <string_view>

namespace formsieve::cli {

/// The text in double quotes, escaped as RFC 8259 asks; bytes that are not UTF-8 become the replacement character.
std::string json_text(std::string_view text);

}  // namespace formsieve::cli

// Breaking prose, equations and lists of terms into lines of a given width.
#pragma once

#include <cstddef>
#include <string>
#include <string_view>
#include <vector>

namespace formsieve::cli {

/// Prose broken at spaces into lines of at most `width` columns; a word longer than a line is cut between characters.
/// A no-break space holds two words together and is written as a space. Never empty.
std::vector<std::string> wrapped(std::string_view text, std::size_t width);

/// An equation, or a sum of terms, broken before its + and − signs (and after "=", before "·") so that no term is torn
/// apart; only a piece longer than a whole line is broken inside its brackets, in the same manner.
std::vector<std::string> wrapped_equation(std::string_view equation, std::size_t width);

/// Lines joined, the first after `first`, the others after `hanging`; ends with a newline.
std::string indented(const std::vector<std::string>& lines, std::string_view first, std::string_view hanging);

}  // namespace formsieve::cli

// What is known of the screen: is it one, how wide, may it be coloured; and how wide a piece of UTF-8 text is on it.
#pragma once

#include <cstddef>
#include <string>
#include <string_view>

namespace formsieve::cli {

/// The device behind a stream, looked at when something is about to be drawn.
struct Terminal {
  bool is_terminal = false;
  bool erases = false;     ///< a terminal, not a dumb one: a line written on it can be taken back
  bool colour = false;     ///< a terminal, not a dumb one, and NO_COLOR is unset or empty
  std::size_t width = 80;  ///< columns
};

inline constexpr int kStandardOutput = 1;
inline constexpr int kStandardError = 2;

/// The width that is assumed where nothing is known, and the limits within which a claimed width is believed: below 20
/// columns nothing can be laid out, beyond 400 the eye loses the line.
inline constexpr std::size_t kDefaultWidth = 80;
inline constexpr std::size_t kNarrowest = 20;
inline constexpr std::size_t kWidest = 400;

/// Looks at a file descriptor. Width: COLUMNS when it is a whole number, else what the terminal says, else 80.
Terminal look_at(int descriptor);

/// How a piece of text is meant; colour is never the only carrier of a meaning.
enum class Tone { plain, strong, quiet, alarm };

/// The text in its tone, or unchanged when `colour` is false or the text is empty.
std::string paint(std::string_view text, Tone tone, bool colour);

/// Columns that UTF-8 text takes on a terminal: combining marks take none, East Asian wide characters and emoji two,
/// a byte that is not UTF-8 one.
std::size_t display_width(std::string_view text);

/// The text with everything replaced that could move the cursor or change the terminal (control characters, bytes that
/// are not UTF-8): names and cells come from files that we did not write.
std::string printable(std::string_view text);

/// At most `width` columns, the loss marked by an ellipsis.
std::string truncated(std::string_view text, std::size_t width);

/// Spaces added on the right (left) up to `width` columns; longer text is returned as it is.
std::string padded_right(std::string_view text, std::size_t width);
std::string padded_left(std::string_view text, std::size_t width);

/// One decoded character of UTF-8 text.
struct Character {
  char32_t code = 0;
  std::size_t n_bytes = 1;
  bool valid = true;
};
Character next_character(std::string_view text);
std::size_t character_width(char32_t code);

}  // namespace formsieve::cli

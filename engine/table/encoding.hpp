// What the bytes of a text file must be: UTF-8 without NUL bytes; and what a file that is no text at all looks like.
#pragma once

#include <cstddef>
#include <optional>
#include <string>
#include <string_view>

namespace formsieve::table {

inline constexpr std::string_view kUtf8Mark = "\xEF\xBB\xBF";

/// Bytes of the UTF-8 sequence that starts at `text[at]` (1 to 4); 0 when it is not one (Unicode 15, table 3-7: no
/// overlong form, no surrogate, nothing beyond U+10FFFF, no stray or missing continuation byte).
std::size_t utf8_length(std::string_view text, std::size_t at) noexcept;

/// True for the bytes 10xxxxxx that can only continue a sequence.
constexpr bool is_utf8_continuation(char byte) noexcept { return (static_cast<unsigned char>(byte) & 0xC0U) == 0x80U; }

/// A file format that is not delimited text, known by its first bytes.
struct ForeignFormat {
  std::string what;  ///< "a compressed file (gzip)"
  std::string hint;
};

/// Recognises spreadsheets, archives, databases and UTF-16 or UTF-32 text by their first bytes.
std::optional<ForeignFormat> recognise_foreign_format(std::string_view bytes);

}  // namespace formsieve::table

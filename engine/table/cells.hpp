// Rows and cells of delimited text (RFC 4180): where they end and what they say.
//
// One rule governs all cutting, in valid and in broken files alike: every double quote switches between outside and
// inside, and only separators and line feeds outside end a cell. For valid files this is RFC 4180; in broken ones it
// makes every reader of the same bytes see the same rows.
#pragma once

#include <array>
#include <cstddef>
#include <string>
#include <string_view>

namespace formsieve::table {

/// The characters that a file's syntax gives a meaning to.
class Syntax {
 public:
  Syntax(char separator, char decimal);

  char separator() const noexcept { return separator_; }
  char decimal() const noexcept { return decimal_; }

  /// Blanks around cells are no part of them: spaces, and tabs where these do not separate.
  bool is_blank(char c) const noexcept { return c == ' ' || c == other_blank_; }
  /// Separator, line feed or double quote.
  bool is_special(char c) const noexcept { return special_[static_cast<unsigned char>(c)]; }
  std::string_view trim(std::string_view text) const noexcept;

 private:
  char separator_;
  char decimal_;
  char other_blank_;
  std::array<bool, 256> special_ = {};
};

enum class CellFault {
  none,
  quote_in_cell,         ///< a double quote in a cell that does not begin with one (RFC 4180, section 2, rule 5)
  text_after_quote,      ///< something follows the closing quote
  unclosed_quote,        ///< the text ends inside quotes
  lone_carriage_return,  ///< a CR that no LF follows, outside quotes
};

/// A cell as found in the text, before its meaning is looked at.
struct RawCell {
  std::string_view raw;  ///< without the separator or line end (LF, CR LF) after it
  const char* stop;      ///< the separator or line feed after it, or the end of the text
  bool has_quotes;
};

/// A cell's content: quotes taken off and doubled quotes made single, or blanks trimmed where it has no quotes.
struct CellText {
  std::string_view text;
  bool in_file = true;  ///< false: `text` lies in the scratch string
  CellFault fault = CellFault::none;
  std::size_t fault_at = 0;  ///< position of the fault within the raw cell
};

/// Finds the end of the cell that starts at `p`. Cost: O(its length).
RawCell scan_cell(const char* p, const char* end, const Syntax& syntax) noexcept;

/// Reads the content of a cell; `scratch` holds it when doubled quotes had to be made single, until the next call.
CellText cell_text(const RawCell& cell, const Syntax& syntax, std::string& scratch);

/// Position after the row that starts at `p`: past the first line feed outside quotes, or `end`.
const char* row_end(const char* p, const char* end) noexcept;

}  // namespace formsieve::table

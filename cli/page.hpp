// A page of terminal text under construction: headings, prose, labelled lines, equations, tables, all within the width.
#pragma once

#include "terminal.hpp"
#include "text_table.hpp"

#include <string>
#include <string_view>
#include <vector>

namespace formsieve::cli {

class Page {
 public:
  explicit Page(Terminal terminal) : terminal_(terminal) {}

  std::size_t width() const noexcept { return terminal_.width; }
  bool colour() const noexcept { return terminal_.colour; }

  void blank();                              ///< one empty line, never two
  void heading(std::string_view text);       ///< a strong line after an empty one
  void prose(std::string_view text);         ///< wrapped, at most 96 columns
  void note(std::string_view text);          ///< a wrapped line after a dash
  void equation(std::string_view equation);  ///< indented, broken before its signs
  /// "label   text": the label padded to `label_width`, the text hanging beside it; under the label when too narrow.
  void labelled(std::string_view label, std::size_t label_width, std::string_view text, Tone label_tone = Tone::plain);
  void command(std::string_view line);  ///< something to type: indented, never broken
  void table(const TextTable& table);

  const std::string& text() const noexcept { return text_; }

 private:
  std::size_t prose_width() const noexcept;
  Terminal terminal_;
  std::string text_;
};

/// The text with its spaces unbreakable: a form and its figure stay on one line.
std::string held_together(std::string_view text);

/// "a", "a and b", "a, b and c".
std::string listed(const std::vector<std::string>& words);
std::string joined(const std::vector<std::string>& words, std::string_view separator);

}  // namespace formsieve::cli

// Taking a drawn page apart.
#pragma once

#include "terminal.hpp"

#include <algorithm>
#include <sstream>
#include <string>
#include <vector>

namespace formsieve::cli::testing {

inline std::vector<std::string> lines_of(const std::string& text) {
  std::vector<std::string> lines;
  std::istringstream stream(text);
  for (std::string line; std::getline(stream, line);) lines.push_back(line);
  return lines;
}

inline std::size_t widest_line(const std::string& text) {
  std::size_t widest = 0;
  for (const std::string& line : lines_of(text)) widest = std::max(widest, display_width(line));
  return widest;
}

inline bool has(const std::string& text, const std::string& part) { return text.find(part) != std::string::npos; }

/// The text with every run of white space as one space: for looking for a sentence that may have been wrapped.
inline std::string unwrapped(const std::string& text) {
  std::istringstream stream(text);
  std::string joined;
  for (std::string word; stream >> word;) joined += (joined.empty() ? "" : " ") + word;
  return joined;
}

inline Terminal plain_terminal(std::size_t width) {
  Terminal terminal;
  terminal.width = width;
  return terminal;
}

}  // namespace formsieve::cli::testing

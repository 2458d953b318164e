#include "table/cells.hpp"

#include <algorithm>
#include <cstring>

namespace formsieve::table {

namespace {

const char* find_char(const char* p, const char* end, char c) noexcept {
  const void* found = p == end ? nullptr : std::memchr(p, c, static_cast<std::size_t>(end - p));
  return found != nullptr ? static_cast<const char*>(found) : end;
}

CellText faulty(CellFault fault, std::string_view raw, std::string_view from) {
  return {{}, true, fault, static_cast<std::size_t>(from.data() - raw.data())};
}

/// Content of a cell that begins with a quote: `cell` is trimmed and has at least the opening quote.
CellText quoted_text(std::string_view raw, std::string_view cell, std::string& scratch) {
  const char* const end = cell.data() + cell.size();
  const char* p = cell.data() + 1;
  bool has_doubled = false;
  for (;;) {
    p = find_char(p, end, '"');
    if (p == end) return faulty(CellFault::unclosed_quote, raw, cell);
    ++p;
    if (p == end) break;
    if (*p != '"') return faulty(CellFault::text_after_quote, raw, cell);
    has_doubled = true;
    ++p;
  }
  const std::string_view inner = cell.substr(1, cell.size() - 2);
  if (!has_doubled) return {inner};
  scratch.clear();
  for (std::size_t i = 0; i < inner.size(); ++i) {
    scratch += inner[i];
    if (inner[i] == '"') ++i;
  }
  return {scratch, false};
}

}  // namespace

Syntax::Syntax(char separator, char decimal)
    : separator_(separator), decimal_(decimal), other_blank_(separator == '\t' ? ' ' : '\t') {
  for (const char c : {separator, '\n', '"'}) special_[static_cast<unsigned char>(c)] = true;
}

std::string_view Syntax::trim(std::string_view text) const noexcept {
  while (!text.empty() && is_blank(text.front())) text.remove_prefix(1);
  while (!text.empty() && is_blank(text.back())) text.remove_suffix(1);
  return text;
}

RawCell scan_cell(const char* p, const char* end, const Syntax& syntax) noexcept {
  const char* const begin = p;
  bool has_quotes = false;
  for (;;) {
    while (p != end && !syntax.is_special(*p)) ++p;
    if (p == end || *p != '"') break;
    has_quotes = true;
    p = find_char(p + 1, end, '"');
    if (p == end) break;
    ++p;
  }
  const char* last = p;
  const bool ends_line = p == end || *p == '\n';
  if (ends_line && last != begin && last[-1] == '\r') --last;
  return {{begin, static_cast<std::size_t>(last - begin)}, p, has_quotes};
}

CellText cell_text(const RawCell& cell, const Syntax& syntax, std::string& scratch) {
  const std::string_view trimmed = syntax.trim(cell.raw);
  if (cell.has_quotes) {
    if (trimmed.front() == '"') return quoted_text(cell.raw, trimmed, scratch);
    return faulty(CellFault::quote_in_cell, cell.raw, trimmed);
  }
  const std::size_t carriage_return = trimmed.find('\r');
  if (carriage_return != trimmed.npos)
    return faulty(CellFault::lone_carriage_return, cell.raw, trimmed.substr(carriage_return));
  return {trimmed};
}

const char* row_end(const char* p, const char* end) noexcept {
  const char* feed = find_char(p, end, '\n');
  for (;;) {
    // Looked for again only once quotes have passed it, so that a row with many quotes costs its length once.
    if (feed < p) feed = find_char(p, end, '\n');
    const char* quote = find_char(p, feed, '"');
    if (quote == feed) return feed == end ? end : feed + 1;
    quote = find_char(quote + 1, end, '"');
    if (quote == end) return end;
    p = quote + 1;
  }
}

}  // namespace formsieve::table

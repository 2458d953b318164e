#include "table/encoding.hpp"

namespace formsieve::table {

namespace {

unsigned char byte_at(std::string_view text, std::size_t at) { return static_cast<unsigned char>(text[at]); }

}  // namespace

std::size_t utf8_length(std::string_view text, std::size_t at) noexcept {
  const unsigned char lead = byte_at(text, at);
  if (lead < 0x80) return 1;
  const std::size_t length = lead < 0xC2 ? 0 : lead < 0xE0 ? 2 : lead < 0xF0 ? 3 : lead < 0xF5 ? 4 : 0;
  if (length == 0 || text.size() - at < length) return 0;
  // The second byte alone decides on overlong forms, surrogates and the upper end.
  const unsigned char second = byte_at(text, at + 1);
  const unsigned char lowest = lead == 0xE0 ? 0xA0 : lead == 0xF0 ? 0x90 : 0x80;
  const unsigned char highest = lead == 0xED ? 0x9F : lead == 0xF4 ? 0x8F : 0xBF;
  if (second < lowest || second > highest) return 0;
  for (std::size_t i = 2; i < length; ++i)
    if (!is_utf8_continuation(text[at + i])) return 0;
  return length;
}

std::optional<ForeignFormat> recognise_foreign_format(std::string_view bytes) {
  using std::string_view_literals::operator""sv;
  const std::string save_as_csv = "Export the sheet as CSV (UTF-8) and read that";
  const std::string save_as_utf8 = "Save it as UTF-8: iconv -f UTF-16 -t UTF-8 old.csv > new.csv";
  if (bytes.starts_with("PK\x03\x04"sv)) return ForeignFormat{"a spreadsheet or a zip archive", save_as_csv};
  if (bytes.starts_with("\xD0\xCF\x11\xE0\xA1\xB1\x1A\xE1"sv)) return ForeignFormat{"an old spreadsheet", save_as_csv};
  if (bytes.starts_with("\x1F\x8B"sv))
    return ForeignFormat{"a compressed file (gzip)", "Unpack it first: gunzip -k FILE"};
  if (bytes.starts_with("\x28\xB5\x2F\xFD"sv)) return ForeignFormat{"a compressed file (zstd)", "Unpack it first"};
  if (bytes.starts_with("BZh"sv) && bytes.size() > 10 && bytes.substr(4, 6) == "\x31\x41\x59\x26\x53\x59"sv)
    return ForeignFormat{"a compressed file (bzip2)", "Unpack it first: bunzip2 -k FILE"};
  if (bytes.starts_with("\xFD\x37zXZ\0"sv))
    return ForeignFormat{"a compressed file (xz)", "Unpack it first: unxz -k FILE"};
  if (bytes.starts_with("SQLite format 3\0"sv))
    return ForeignFormat{"an SQLite database", "Say which rows to read: data.query = \"select … from …\""};
  // A header may well begin with a column named PAR1; binary content never lacks a NUL byte.
  if (bytes.starts_with("PAR1"sv) && bytes.ends_with("PAR1"sv) && bytes.find('\0') != bytes.npos)
    return ForeignFormat{"a Parquet file", "Export it as CSV and read that"};
  if (bytes.starts_with("%PDF-"sv)) return ForeignFormat{"a PDF document", "Export the table as CSV and read that"};
  if (bytes.starts_with("\xFF\xFE"sv) || bytes.starts_with("\xFE\xFF"sv) || bytes.starts_with("\0\0\xFE\xFF"sv))
    return ForeignFormat{"text in UTF-16 or UTF-32", save_as_utf8};
  return std::nullopt;
}

}  // namespace formsieve::table

// SHA-256 (FIPS 180-4) of bytes and files, the fingerprint by which a run knows its table again.
#pragma once

#include <formsieve/base.hpp>

#include <string>
#include <string_view>

namespace formsieve::table {

/// SHA-256 of `bytes` as 64 lower-case hexadecimal digits.
std::string sha256_hex(std::string_view bytes);

/// The same of a file, read piece by piece. Errors (kind io) when it cannot be read.
Result<std::string> sha256_hex_of_file(const std::string& path);

}  // namespace formsieve::table

// Whole files in and out: a file is either the old one or the new one, never half of one.
#pragma once

#include <formsieve/base.hpp>

#include <cstddef>
#include <string>
#include <string_view>

namespace formsieve::run {

/// No file of a run folder comes near this; it keeps a wrong path from filling the memory.
inline constexpr std::size_t kLargestFileBytes = std::size_t{1} << 30;

/// The bytes of a file. Errors (kind io): missing, a folder, unreadable, longer than `largest_bytes`.
Result<std::string> read_file(const std::string& path, std::size_t largest_bytes = kLargestFileBytes);

/// Replaces a file in one step: the text goes to a file beside it, is brought to the disk, and takes its name. Errors
/// (kind io): the folder is missing or not writable, the disk is full. On an error the old file is untouched.
Status write_file(const std::string& path, std::string_view text);

}  // namespace formsieve::run

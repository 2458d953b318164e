// How much memory the process may still take.
#pragma once

#include <cstdint>
#include <optional>
#include <string>

namespace formsieve::base {

/// Bytes that the process may still take without the machine or its control group running out: the least of what the
/// kernel calls available and what the groups leave, of either version of control groups. Nothing when none of it can
/// be read. `root` stands before the paths of the system's files, for tests.
std::optional<std::uint64_t> available_memory(const std::string& root = "");

}  // namespace formsieve::base

#include "base/memory.hpp"

#include <algorithm>
#include <fstream>

namespace formsieve::base {

namespace {

/// The number that a file begins with; nothing for a word such as "max".
std::optional<std::uint64_t> number_in(const std::string& path) {
  std::ifstream file(path);
  std::uint64_t number = 0;
  if (file >> number) return number;
  return std::nullopt;
}

/// The number after a word at the beginning of a line.
std::optional<std::uint64_t> number_after(const std::string& path, const std::string& word) {
  std::ifstream file(path);
  std::string first;
  std::uint64_t number = 0;
  for (std::string rest; file >> first; std::getline(file, rest))
    if (first == word && file >> number) return number;
  return std::nullopt;
}

std::optional<std::uint64_t> left_by_machine(const std::string& root) {
  const auto kilobytes = number_after(root + "/proc/meminfo", "MemAvailable:");
  if (!kilobytes) return std::nullopt;
  return *kilobytes * 1024;
}

/// What a control group leaves; file pages that it can drop at once are not counted as taken.
std::optional<std::uint64_t> left_by_group(const std::string& limit_file, const std::string& usage_file,
                                           const std::string& statistics_file, const std::string& droppable) {
  const auto limit = number_in(limit_file);
  const auto usage = number_in(usage_file);
  if (!limit || !usage) return std::nullopt;
  const std::uint64_t taken = *usage - std::min(*usage, number_after(statistics_file, droppable).value_or(0));
  return *limit - std::min(*limit, taken);
}

}  // namespace

std::optional<std::uint64_t> available_memory(const std::string& root) {
  const std::string two = root + "/sys/fs/cgroup/";
  const std::string one = two + "memory/";
  std::optional<std::uint64_t> least;
  for (const auto& left :
       {left_by_machine(root),
        left_by_group(two + "memory.max", two + "memory.current", two + "memory.stat", "inactive_file"),
        left_by_group(one + "memory.limit_in_bytes", one + "memory.usage_in_bytes", one + "memory.stat",
                      "total_inactive_file")})
    if (left) least = std::min(least.value_or(*left), *left);
  return least;
}

}  // namespace formsieve::base

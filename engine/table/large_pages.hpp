// Memory that is about to be filled from end to end.
#pragma once

#include <cstddef>

namespace formsieve::table {

/// Asks the system to back [begin, begin + size) with large pages, where it has them: filling fresh memory page by
/// small page costs about as much as reading the file. Does nothing for small blocks; never fails.
void prefer_large_pages(void* begin, std::size_t size) noexcept;

}  // namespace formsieve::table

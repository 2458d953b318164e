#include "table/large_pages.hpp"

#include <sys/mman.h>

#include <cstdint>

namespace formsieve::table {

namespace {

/// Size of a large page on x86-64 and, with 4 KiB base pages, on 64-bit ARM.
constexpr std::uintptr_t kLargePage = std::uintptr_t{2} << 20;

}  // namespace

void prefer_large_pages(void* begin, std::size_t size) noexcept {
#ifdef MADV_HUGEPAGE
  const auto address = reinterpret_cast<std::uintptr_t>(begin);
  const std::uintptr_t first = (address + kLargePage - 1) / kLargePage * kLargePage;
  const std::uintptr_t last = (address + size) / kLargePage * kLargePage;
  if (last > first) ::madvise(reinterpret_cast<void*>(first), last - first, MADV_HUGEPAGE);
#else
  static_cast<void>(begin);
  static_cast<void>(size);
#endif
}

}  // namespace formsieve::table

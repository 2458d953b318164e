// The yardstick of the machine at this moment: how many vector operations it issues.
#pragma once

#include <cstddef>

namespace formsieve::bench {

/// Fused multiplications and additions of the widest vectors in use, a second, on the calling thread: a loop of
/// independent ones that does nothing else, for about 20 ms.
double fma_per_second();

/// Doubles in one such vector.
std::size_t fma_lanes();

}  // namespace formsieve::bench

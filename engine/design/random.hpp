// The generator of room base, by the names that this room uses.
#pragma once

#include "base/random.hpp"

namespace formsieve::design {

using base::shuffle;
using base::SplitMix64;

}  // namespace formsieve::design

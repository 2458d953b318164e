#include "base/simd_targets.hpp"

#include <hwy/targets.h>

#include <cstdint>

namespace formsieve::base {

namespace {

/// The sets that the kernels are compiled for, each with those that the compiler may use everywhere: Highway's own
/// bits.
constexpr std::int64_t kAvx512 = HWY_AVX3;
constexpr std::int64_t kAvx2 = HWY_AVX2;
constexpr std::int64_t kBaseline = HWY_STATIC_TARGET;

std::int64_t set_named(std::string_view name) {
  if (name == "avx512") return kAvx512;
  if (name == "avx2") return kAvx2;
  return kBaseline;
}

/// Makes every kernel look again at its next call; 0 for all that the processor has.
void let_choose(std::int64_t sets) {
  hwy::SetSupportedTargetsForTest(sets);
  hwy::GetChosenTarget().Update(hwy::SupportedTargets());
}

/// What the processor has among the sets that the kernels are compiled for, whatever is forced.
std::int64_t available() {
  const std::int64_t forced = hwy::SupportedTargets();
  hwy::SetSupportedTargetsForTest(0);
  const std::int64_t all = hwy::SupportedTargets() & HWY_TARGETS;
  let_choose(forced);
  return all;
}

}  // namespace

std::string instruction_set() {
  const std::int64_t sets = hwy::SupportedTargets() & HWY_TARGETS;
  if ((sets & kAvx512) != 0) return "AVX-512";
  if ((sets & kAvx2) != 0) return "AVX2";
  return "baseline";
}

Status force_instruction_set(std::string_view name) {
  if (name == "best") {
    let_choose(0);
    return {};
  }
  if (name != "baseline" && name != "avx2" && name != "avx512")
    return Error{ErrorKind::usage, "there is no instruction set named '" + std::string(name) + "'", "",
                 "choose baseline, avx2, avx512 or best"};
  const std::int64_t wanted = set_named(name);
  if ((available() & wanted) == 0)
    return Error{ErrorKind::usage, "this processor does not have the instruction set '" + std::string(name) + "'", "",
                 "choose best, which takes the best that the processor has"};
  let_choose(wanted);
  return {};
}

}  // namespace formsieve::base

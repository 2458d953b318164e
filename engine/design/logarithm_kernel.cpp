#include "design/logarithm_kernel.hpp"

#include "base/simd_targets.hpp"

#include <cmath>
#include <limits>

#undef HWY_TARGET_INCLUDE
#define HWY_TARGET_INCLUDE "design/logarithm_kernel.cpp"
#include <hwy/foreach_target.h>
#include <hwy/highway.h>

#include <hwy/contrib/math/math-inl.h>

HWY_BEFORE_NAMESPACE();
namespace formsieve::design::HWY_NAMESPACE {

namespace hn = hwy::HWY_NAMESPACE;

#if HWY_TARGET == HWY_SCALAR || HWY_TARGET == HWY_EMU128

void logarithms(double* values, std::size_t n) {
  for (std::size_t i = 0; i < n; ++i)
    values[i] = values[i] > 0.0 ? std::log(values[i]) : std::numeric_limits<double>::quiet_NaN();
}

#else

template <class Tag>
HWY_INLINE void replace(Tag tag, double* at) {
  const auto value = hn::LoadU(tag, at);
  const auto undefined = hn::Set(tag, std::numeric_limits<double>::quiet_NaN());
  const auto result = hn::Log(tag, value);
  hn::StoreU(hn::IfThenElse(hn::Gt(value, hn::Zero(tag)), result, undefined), tag, at);
}

void logarithms(double* values, std::size_t n) {
  const hn::ScalableTag<double> tag;
  const std::size_t lanes = hn::Lanes(tag);
  std::size_t i = 0;
  for (; i + lanes <= n; i += lanes) replace(tag, values + i);
  for (; i < n; ++i) replace(hn::CappedTag<double, 1>(), values + i);
}

#endif

}  // namespace formsieve::design::HWY_NAMESPACE
HWY_AFTER_NAMESPACE();

#if HWY_ONCE
namespace formsieve::design {

HWY_EXPORT(logarithms);

void take_logarithms(double* values, std::size_t n) { HWY_DYNAMIC_DISPATCH(logarithms)(values, n); }

}  // namespace formsieve::design
#endif

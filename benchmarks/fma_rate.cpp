#include "fma_rate.hpp"

#include "base/simd_targets.hpp"
#include "stopwatch.hpp"

#include <algorithm>

#ifndef FORMSIEVE_BENCH_CHAINS
#define FORMSIEVE_BENCH_CHAINS
namespace formsieve::bench {
constexpr std::size_t kChains = 12;  // more than are in flight, fewer than there are registers
}  // namespace formsieve::bench
#endif

#undef HWY_TARGET_INCLUDE
#define HWY_TARGET_INCLUDE "fma_rate.cpp"
#include <hwy/foreach_target.h>
#include <hwy/highway.h>

HWY_BEFORE_NAMESPACE();
namespace formsieve::bench::HWY_NAMESPACE {

namespace hn = hwy::HWY_NAMESPACE;

double run_chains(std::size_t n_rounds) {
  const hn::ScalableTag<double> tag;
  const auto factor = hn::Set(tag, 1.0 - 1e-9);
  const auto term = hn::Set(tag, 1e-9);
  hn::Vec<decltype(tag)> chain[kChains];
  for (std::size_t i = 0; i < kChains; ++i) chain[i] = hn::Set(tag, static_cast<double>(i));
  for (std::size_t round = 0; round < n_rounds; ++round)
    for (std::size_t i = 0; i < kChains; ++i) chain[i] = hn::MulAdd(chain[i], factor, term);
  auto sum = hn::Zero(tag);
  for (std::size_t i = 0; i < kChains; ++i) sum = hn::Add(sum, chain[i]);
  return hn::GetLane(sum);
}

std::size_t lanes() { return hn::Lanes(hn::ScalableTag<double>()); }

}  // namespace formsieve::bench::HWY_NAMESPACE
HWY_AFTER_NAMESPACE();

#if HWY_ONCE
namespace formsieve::bench {

HWY_EXPORT(run_chains);
HWY_EXPORT(lanes);

double fma_per_second() {
  constexpr std::size_t kRounds = 4'000'000 / kChains;
  volatile double sink = 0.0;
  double best = 0.0;
  for (int i = 0; i < 6; ++i) {
    const double seconds = thread_seconds([&] { sink = HWY_DYNAMIC_DISPATCH(run_chains)(kRounds); });
    best = std::max(best, static_cast<double>(kRounds * kChains) / seconds);
  }
  return best;
}

std::size_t fma_lanes() { return HWY_DYNAMIC_DISPATCH(lanes)(); }

}  // namespace formsieve::bench
#endif

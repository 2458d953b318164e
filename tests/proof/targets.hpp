// Tests on every instruction set that this processor has.
#pragma once

#include <catch2/catch.hpp>

#include <hwy/targets.h>

namespace formsieve::test {

/// Runs with one instruction set after the other.
template <class Body>
void on_every_target(const Body& body) {
  for (const auto target : hwy::SupportedAndGeneratedTargets()) {
    hwy::SetSupportedTargetsForTest(target);
    INFO(hwy::TargetName(target));
    body();
  }
  hwy::SetSupportedTargetsForTest(0);
}

}  // namespace formsieve::test

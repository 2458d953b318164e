// Runs a check with every instruction set that the processor has.
#pragma once

#include <formsieve/base.hpp>

#include <catch2/catch.hpp>

namespace formsieve::test {

/// Calls `check` with each instruction set in use in turn, then goes back to the best.
template <class Check>
void for_each_instruction_set(Check check) {
  for (const char* name : {"baseline", "avx2", "avx512"}) {
    if (!base::force_instruction_set(name)) continue;  // the processor does not have it
    INFO("instruction set " << name);
    check();
  }
  REQUIRE(base::force_instruction_set("best").ok());
}

}  // namespace formsieve::test

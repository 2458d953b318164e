// The instruction sets that kernels are compiled for, and which of them runs.
//
// A file with a kernel for several instruction sets includes this header before hwy/foreach_target.h: every such file
// must be compiled for the same sets, or forcing one would force different ones in different kernels.
#pragma once

// AVX-512, AVX2 with FMA, and what every processor of the architecture has. Highway 1.0 knows no set of plain SSE2: its
// part is played by the scalar target, one lane wide, which the compiler may still put into SSE2 registers.
#if defined(__x86_64__)
#define HWY_DISABLED_TARGETS (~(HWY_AVX3 | HWY_AVX2 | HWY_EMU128 | HWY_SCALAR))
#endif

#include <formsieve/base.hpp>

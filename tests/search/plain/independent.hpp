// The one compiler hint of the walk's kernels.
//
// A loop marked FORMSIEVE_INDEPENDENT updates its elements independently. The compiler cannot see that two pointers
// into one allocation do not overlap, or do so element by element only.
#pragma once

#if defined(__clang__)
#define FORMSIEVE_INDEPENDENT _Pragma("clang loop vectorize(assume_safety)")
#elif defined(__GNUC__)
#define FORMSIEVE_INDEPENDENT _Pragma("GCC ivdep")
#else
#define FORMSIEVE_INDEPENDENT
#endif

// What a proof says, in the result types of judge.
#pragma once

#include <formsieve/judge.hpp>

#include "pipeline/prepare.hpp"
#include "pipeline/proving.hpp"

namespace formsieve::pipeline {

/// Figures rounded as those of the walk's summary, sentences for a reviewer.
judge::ProofReport proof_report(const Proved& proved, const Prepared& prepared, double within);

}  // namespace formsieve::pipeline

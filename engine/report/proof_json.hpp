// The proof in shortlist.json. Private to room report.
#pragma once

#include <formsieve/judge.hpp>

#include "report/json_text.hpp"

namespace formsieve::report {

/// { "proof": { … } }; empty when there was none.
Json proof_json(const judge::ProofReport& proof, const std::vector<forms::Form>& responses);

}  // namespace formsieve::report

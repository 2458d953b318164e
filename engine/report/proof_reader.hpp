// Reads the proof back from shortlist.json. Private to room report.
#pragma once

#include <formsieve/judge.hpp>

#include "report/json_reader.hpp"

namespace formsieve::report {

/// Empty when the file has none. The nodes of the proof are not in the file.
judge::ProofReport read_proof(const Node& root, std::size_t n_responses);

}  // namespace formsieve::report

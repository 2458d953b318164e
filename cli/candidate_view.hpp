// One candidate in full, in the order in which a review meeting asks: what is it, how well does it predict, what is
// wrong with it, what does going back to own units cost, where may it be used.
#pragma once

#include "terminal.hpp"

#include <formsieve/judge.hpp>

#include <string>

namespace formsieve::cli {

/// `candidate` is one of the shortlist's.
std::string candidate_page(const judge::Shortlist& shortlist, const judge::Candidate& candidate,
                           const std::string& run_folder, const Terminal& terminal);

}  // namespace formsieve::cli

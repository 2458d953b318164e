// One line of a shortlist as a person names it: by rank, or by the name that the line carries.
#pragma once

#include <formsieve/base.hpp>
#include <formsieve/judge.hpp>

#include <string>

namespace formsieve::cli {

/// "7", "recommended", "lowest AIC". The pointer is into `shortlist`. Errors (kind usage): no such line, with those
/// that there are.
Result<const judge::Candidate*> find_candidate(const judge::Shortlist& shortlist, const std::string& wanted);

}  // namespace formsieve::cli

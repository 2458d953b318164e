// What a proof says of the whole space: in sentences, what each form costs, and the best of each number of terms.
#pragma once

#include "page.hpp"

#include <formsieve/judge.hpp>

namespace formsieve::cli {

/// Nothing when the run holds no proof. `whole`: no table is cut to a screen.
void proof_tables(Page& page, const judge::Shortlist& shortlist, bool whole);

}  // namespace formsieve::cli

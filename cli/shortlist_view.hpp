// The result of a search as a screen: the ranked table, the recommended equation, what must be kept in mind.
#pragma once

#include "terminal.hpp"

#include <formsieve/judge.hpp>

#include <string>

namespace formsieve::cli {

/// The shortlist with everything said about it once, and what to type next.
std::string shortlist_page(const judge::Shortlist& shortlist, const std::string& run_folder, const Terminal& terminal);

/// CV RMSE with its standard error, the same decimals throughout one table ("12,340 ± 610").
std::string error_with_se(const judge::CrossValidation& cv, int decimals);

/// What each form, each absence and each number of terms costs, of every predictor: the tables of the shortlist page
/// uncut.
std::string profile_page(const judge::Shortlist& shortlist, const Terminal& terminal);

}  // namespace formsieve::cli

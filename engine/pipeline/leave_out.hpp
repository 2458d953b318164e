// What becomes of the ranking when a single row is left out.
#pragma once

#include <formsieve/judge.hpp>
#include <formsieve/run.hpp>

#include "pipeline/listing.hpp"
#include "pipeline/prepare.hpp"

#include <cstddef>
#include <string>
#include <vector>

namespace formsieve::pipeline {

/// Rows in use beyond which nothing is left out: one of so many cannot turn a ranking, and each would cost as much as
/// scoring the shortlist anew.
inline constexpr std::size_t kMostRowsForLeavingOut = 20'000;

/// Everything of a search but one row; menus, anchors and the folds of the others stay as they are. `row` counts among
/// the rows in use.
Prepared without_row(const Prepared& prepared, std::size_t row);

/// For each influential row of the first of `listed` [by rank, complete], the listed candidate that leads by the plan's
/// criterion without that row, every score made anew from the rest: exact for each criterion, own-units
/// cross-validation among them. Sets leader_without in every listed candidate that names the row, and returns a
/// sentence for each row that changes who leads. Nothing is done beyond kMostRowsForLeavingOut rows, nor where the row
/// is alone in a fold. The same for any number of threads. Cost: scoring all listed candidates, once for each row.
std::vector<std::string> find_leaders_without_rows(const Prepared& prepared, const run::Plan& plan,
                                                   const ChoiceByNumber& choices, std::vector<judge::Candidate>& listed,
                                                   unsigned threads);

}  // namespace formsieve::pipeline

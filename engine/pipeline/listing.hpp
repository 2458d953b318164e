// From the examined candidates to the lines of the shortlist: order, gates, names, families, the full record of what is
// listed.
#pragma once

#include <formsieve/judge.hpp>
#include <formsieve/run.hpp>

#include "pipeline/examine.hpp"
#include "pipeline/prepare.hpp"
#include "search/space.hpp"

#include <cstddef>
#include <cstdint>
#include <functional>
#include <map>
#include <string>
#include <vector>

namespace formsieve::pipeline {

using ChoiceByNumber = std::map<std::string, search::Choice>;

/// Predictions are compared on so many rows at most, evenly taken from those in use: enough for a root mean square that
/// is good to 1 %, and 25 leaders' predictions stay within some megabytes.
inline constexpr std::size_t kComparedRows = 20000;

/// Told what the listing is at; may be empty. `done` is called from several threads.
struct ListingWatch {
  std::function<void(const std::string& phase, double total, const std::string& unit)> begin;
  std::function<void(std::uint64_t units)> done;
};

struct Listing {
  std::vector<judge::Candidate> candidates;  ///< the lines by rank, complete
  std::vector<std::string> remarks;
  std::size_t n_set_aside = 0;  ///< candidates that fail a required check
  std::string family_rule;      ///< in words
};

/// Ranks the examined candidates by the plan's criterion, gives the named lines to those that pass the required checks,
/// and goes down the ranking until the shortlist is full (judge::select). Checks are run only of what the gates ask
/// for and of what is listed; predictions are computed only as far down as the shortlist reaches. The same bits for
/// any number of threads. Errors: those of Examiner::complete.
Result<Listing> list_candidates(const Prepared& prepared, const Examiner& examiner, const run::Plan& plan,
                                std::vector<judge::Candidate> candidates, const ChoiceByNumber& choices,
                                unsigned threads, const ListingWatch& watch = {});

}  // namespace formsieve::pipeline

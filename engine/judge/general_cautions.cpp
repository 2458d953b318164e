#include "judge/judge.hpp"

#include "judge/words.hpp"

namespace formsieve::judge {

namespace {

/// Below this many rows the winner's cross-validated error was too low by a sixth and more in simulations, and normal
/// prediction intervals covered 93 % instead of 95.
constexpr std::size_t kFewRows = 100;

std::string search_sentence(const Shortlist& shortlist) {
  const std::string rows = counted(shortlist.data.rows_used, "row");
  const std::string searched = shortlist.space.complete ? shortlist.space.candidates : shortlist.space.scored;
  if (searched == "1") return "One candidate was fitted to " + rows + "; nothing was chosen among others.";
  return "The first line is the best of " + grouped_digits(searched) + " candidates on the same " + rows +
         ", so its cross-validated error is too low: expect more on new rows.";
}

}  // namespace

std::vector<std::string> general_cautions(const Shortlist& shortlist) {
  std::vector<std::string> said;
  said.emplace_back(
      "These equations describe what goes together in the rows given, not what causes what: changing a column need not "
      "move the response as the equation says.");
  said.emplace_back(
      "Do not use an equation outside the ranges of its columns (listed with each candidate), nor for rows of another "
      "kind than those it was fitted to.");
  said.push_back(search_sentence(shortlist));
  if (shortlist.space.candidates != "1")
    said.emplace_back(
        "Standard errors, p-values and intervals are computed as if the forms had been chosen beforehand; after a "
        "search they are optimistic, and a small p-value of a term is no evidence that the term is needed.");
  if (shortlist.data.rows_used < kFewRows)
    said.push_back("With " + counted(shortlist.data.rows_used, "row") +
                   " the ranking hangs on few of them: other rows may well put another candidate first.");
  said.emplace_back(
      "Decisions that touch safety, health or money follow local codes and the judgement of a licensed professional, "
      "not this list.");
  return said;
}

}  // namespace formsieve::judge

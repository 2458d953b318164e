#include "chosen_candidate.hpp"

#include "page.hpp"
#include "words.hpp"

#include <vector>

namespace formsieve::cli {
namespace {

// "1 to 25 and 31" of ranks in rising order.
std::string ranks_listed(const judge::Shortlist& shortlist) {
  std::vector<std::string> parts;
  for (std::size_t i = 0; i < shortlist.candidates.size();) {
    std::size_t last = i;
    while (last + 1 < shortlist.candidates.size() &&
           shortlist.candidates[last + 1].rank == shortlist.candidates[last].rank + 1) {
      ++last;
    }
    const std::string from = std::to_string(shortlist.candidates[i].rank);
    parts.push_back(last == i ? from : from + " to " + std::to_string(shortlist.candidates[last].rank));
    i = last + 1;
  }
  return listed(parts);
}

std::vector<std::string> marks_given(const judge::Shortlist& shortlist) {
  std::vector<std::string> marks;
  for (const judge::Candidate& candidate : shortlist.candidates) {
    marks.insert(marks.end(), candidate.marks.begin(), candidate.marks.end());
  }
  return marks;
}

}  // namespace

Result<const judge::Candidate*> find_candidate(const judge::Shortlist& shortlist, const std::string& wanted) {
  for (const judge::Candidate& candidate : shortlist.candidates) {
    if (std::to_string(candidate.rank) == wanted || has_mark(candidate, wanted)) return &candidate;
  }
  const std::vector<std::string> marks = marks_given(shortlist);
  const std::string also = marks.empty() ? "" : ", or a named line: " + joined(marks, ", ");
  return Error{ErrorKind::usage, "the shortlist has no rank '" + wanted + "'", "",
               "give one of the ranks " + ranks_listed(shortlist) + also};
}

}  // namespace formsieve::cli

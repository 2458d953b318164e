// The best candidates by one rule for one response: bounded, with a strict total order, so that the same candidates
// give the same list in whatever order they come.
#pragma once

#include <cstddef>
#include <cstdint>
#include <limits>
#include <span>
#include <vector>

namespace formsieve::search {

/// One term of a candidate as an integer that orders like its digit in the candidate's number: a term of an earlier
/// predictor outweighs all terms of later ones, then the choice decides.
using TermCode = std::uint32_t;
TermCode term_code(std::size_t predictor, std::uint16_t choice);
std::size_t predictor_of(TermCode code);
std::uint16_t choice_of(TermCode code);

/// A candidate of the list. Its terms, falling by code, compare lexicographically as the candidates' numbers do.
struct Listed {
  double score = 0.0;  ///< what the list is ordered by
  double cv_sse = 0.0;
  double rss = 0.0;
  std::size_t n_columns = 0;
  std::span<const TermCode> terms;
};

/// Smaller score first, then smaller candidate number.
bool better(const Listed& a, const Listed& b);

class BestList {
 public:
  /// Keeps at most `keep` candidates of at most `most_terms` terms and of no greater score than `limit`. All memory is
  /// taken here.
  BestList(std::size_t keep, std::size_t most_terms, double limit = std::numeric_limits<double>::infinity());
  BestList(BestList&&) = default;

  /// A candidate with a greater score need not be offered.
  double worst_score() const { return worst_score_; }
  /// Copies the candidate in if it belongs among the best. No allocation.
  void offer(const Listed& candidate);

  /// In no particular order; the spans live as long as the list is not changed.
  std::span<const Listed> entries() const { return heap_; }

 private:
  void place(Listed candidate, TermCode* terms);

  std::size_t keep_, most_terms_;
  double limit_, worst_score_;
  std::vector<Listed> heap_;     ///< worst on top
  std::vector<TermCode> terms_;  ///< [keep × most_terms]
};

}  // namespace formsieve::search

#include "search/best_list.hpp"

#include <algorithm>
#include <cassert>
#include <limits>

namespace formsieve::search {

namespace {
constexpr unsigned kChoiceBits = 16;
constexpr TermCode kChoiceMask = (TermCode{1} << kChoiceBits) - 1;
}  // namespace

TermCode term_code(std::size_t predictor, std::uint16_t choice) {
  assert(predictor < kChoiceMask);
  return ((kChoiceMask - static_cast<TermCode>(predictor)) << kChoiceBits) | choice;
}

std::size_t predictor_of(TermCode code) { return kChoiceMask - (code >> kChoiceBits); }

std::uint16_t choice_of(TermCode code) { return static_cast<std::uint16_t>(code & kChoiceMask); }

bool better(const Listed& a, const Listed& b) {
  if (a.score != b.score) return a.score < b.score;
  return std::lexicographical_compare(a.terms.begin(), a.terms.end(), b.terms.begin(), b.terms.end());
}

BestList::BestList(std::size_t keep, std::size_t most_terms, double limit)
    : keep_(keep),
      most_terms_(most_terms),
      limit_(keep == 0 ? -std::numeric_limits<double>::infinity() : limit),
      worst_score_(limit_),
      terms_(keep * most_terms) {
  heap_.reserve(keep);
}

void BestList::offer(const Listed& candidate) {
  if (keep_ == 0 || !(candidate.score <= limit_)) return;
  if (heap_.size() < keep_) {
    place(candidate, terms_.data() + heap_.size() * most_terms_);
  } else {
    if (!better(candidate, heap_.front())) return;
    std::pop_heap(heap_.begin(), heap_.end(), better);
    TermCode* const freed = terms_.data() + (heap_.back().terms.data() - terms_.data());
    heap_.pop_back();
    place(candidate, freed);
  }
  if (heap_.size() == keep_) worst_score_ = heap_.front().score;
}

void BestList::place(Listed candidate, TermCode* terms) {
  std::copy(candidate.terms.begin(), candidate.terms.end(), terms);
  candidate.terms = {terms, candidate.terms.size()};
  heap_.push_back(candidate);
  std::push_heap(heap_.begin(), heap_.end(), better);
}

}  // namespace formsieve::search

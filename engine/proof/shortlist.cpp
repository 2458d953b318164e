#include "proof/shortlist.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <tuple>

namespace formsieve::proof {

bool Shortlist::Better::operator()(const Listed& a, const Listed& b) const {
  // candidate numbers compare as the response and then the choices in plan order do
  return std::tie(a.score, a.choice.response, a.choice.choice) < std::tie(b.score, b.choice.response, b.choice.choice);
}

double Shortlist::threshold() const {
  if (keep_ == 0) return -std::numeric_limits<double>::infinity();
  double threshold = std::numeric_limits<double>::infinity();
  if (full()) threshold = std::prev(listed_.end())->score;
  if (!listed_.empty()) threshold = std::min(threshold, listed_.begin()->score + within_);
  return threshold;
}

bool Shortlist::offer(const search::Choice& choice, const CandidateScore& score) {
  if (!std::isfinite(score.score) || score.score > threshold()) return false;
  const auto [place, listed] = listed_.insert({choice, score.score, score.rss_rel, score.n_columns});
  if (!listed) return false;
  const double limit = listed_.begin()->score + within_;
  while (listed_.size() > keep_ || std::prev(listed_.end())->score > limit) {
    const bool itself = std::prev(listed_.end()) == place;
    listed_.erase(std::prev(listed_.end()));
    if (itself) return false;
  }
  return true;
}

std::vector<Listed> Shortlist::best(std::size_t most) const {
  std::vector<Listed> entries;
  for (auto entry = listed_.begin(); entry != listed_.end() && entries.size() < most; ++entry)
    entries.push_back(*entry);
  return entries;
}

}  // namespace formsieve::proof

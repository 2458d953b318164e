// The best candidates met so far.
#pragma once

#include "proof/problem.hpp"
#include "proof/prove.hpp"

#include <cstddef>
#include <set>
#include <vector>

namespace formsieve::proof {

/// At most `keep` candidates, best first, ties by candidate number; the same whatever the order they come in.
class Shortlist {
 public:
  Shortlist(std::size_t keep, double within) : keep_(keep), within_(within) {}

  /// A candidate above it need not be offered: the worst of a full list, or the best + within.
  double threshold() const;
  /// True when it is listed and was not before. Infinite scores never are.
  bool offer(const search::Choice& choice, const CandidateScore& score);

  bool full() const { return listed_.size() >= keep_; }
  std::size_t size() const { return listed_.size(); }
  const Listed* best() const { return listed_.empty() ? nullptr : &*listed_.begin(); }
  std::vector<Listed> entries() const { return best(listed_.size()); }
  std::vector<Listed> best(std::size_t most) const;

 private:
  struct Better {
    bool operator()(const Listed& a, const Listed& b) const;
  };

  std::size_t keep_;
  double within_;
  std::set<Listed, Better> listed_;
};

}  // namespace formsieve::proof

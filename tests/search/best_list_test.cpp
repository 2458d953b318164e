#include "search/best_list.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <limits>
#include <random>

using namespace formsieve::search;

namespace {

/// The codes of a choice, falling.
std::vector<TermCode> codes(const std::vector<std::uint16_t>& choice) {
  std::vector<TermCode> terms;
  for (std::size_t j = 0; j < choice.size(); ++j)
    if (choice[j] != 0) terms.push_back(term_code(j, choice[j]));
  return terms;
}

}  // namespace

TEST_CASE("search: term codes compare as candidate numbers do", "[search][property]") {
  // every choice of three predictors with 2, 3 and 1 forms, in rising order of number
  std::vector<std::vector<TermCode>> rising;
  for (std::uint16_t a = 0; a <= 2; ++a)
    for (std::uint16_t b = 0; b <= 3; ++b)
      for (std::uint16_t c = 0; c <= 1; ++c) rising.push_back(codes({a, b, c}));
  for (std::size_t i = 0; i < rising.size(); ++i)
    for (std::size_t j = 0; j < rising.size(); ++j)
      CHECK(better({1.0, 0, 0, 0, rising[i]}, {1.0, 0, 0, 0, rising[j]}) == (i < j));
  CHECK(predictor_of(term_code(1234, 56)) == 1234);
  CHECK(choice_of(term_code(1234, 56)) == 56);
}

TEST_CASE("search: a list keeps the best in whatever order candidates come", "[search][property]") {
  struct Candidate {
    double score;
    std::vector<TermCode> terms;
  };
  std::vector<Candidate> candidates;
  std::mt19937_64 random(7);
  for (std::uint16_t a = 0; a < 20; ++a)
    for (std::uint16_t b = 0; b < 20; ++b)
      candidates.push_back({static_cast<double>(random() % 40), codes({a, b})});  // many ties
  candidates[5].score = std::numeric_limits<double>::infinity();
  const auto listed = [](const Candidate& c) { return Listed{c.score, 0, 0, 0, c.terms}; };
  std::vector<Candidate> sorted = candidates;
  std::sort(sorted.begin(), sorted.end(),
            [&](const Candidate& a, const Candidate& b) { return better(listed(a), listed(b)); });

  for (const std::size_t keep : {0u, 1u, 17u, 400u, 1000u}) {
    std::shuffle(candidates.begin(), candidates.end(), random);
    BestList list(keep, 2);
    for (const Candidate& c : candidates) list.offer(listed(c));
    std::vector<Listed> kept(list.entries().begin(), list.entries().end());
    std::sort(kept.begin(), kept.end(), better);
    REQUIRE(kept.size() == std::min(keep, candidates.size()));
    for (std::size_t i = 0; i < kept.size(); ++i) {
      CHECK(kept[i].score == sorted[i].score);
      CHECK(std::equal(kept[i].terms.begin(), kept[i].terms.end(), sorted[i].terms.begin(), sorted[i].terms.end()));
    }
    if (keep == 17) CHECK(list.worst_score() == sorted[16].score);
  }
}

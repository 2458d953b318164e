#include "candidate_view.hpp"
#include "lines.hpp"
#include "samples.hpp"

#include <catch2/catch.hpp>

using namespace formsieve;
using namespace formsieve::cli;
using namespace formsieve::cli::testing;

namespace {

std::string page_of(std::size_t index, std::size_t width) {
  const judge::Shortlist shortlist = samples::shortlist();
  return candidate_page(shortlist, shortlist.candidates[index], "coldstores.run", plain_terminal(width));
}

}  // namespace

TEST_CASE("cli: one candidate in full fits every width from 40 columns on", "[cli][unit]") {
  for (const std::size_t width : {40U, 60U, 80U, 120U}) {
    CAPTURE(width);
    for (std::size_t index = 0; index < 4; ++index) CHECK(widest_line(page_of(index, width)) <= width);
  }
}

TEST_CASE("cli: one candidate in full answers every question with its figures", "[cli][unit]") {
  const std::string page = unwrapped(page_of(1, 80));
  CHECK(has(page, "Rank 2: recommended, lowest AIC"));
  CHECK(has(page, "Candidate 834,213 of 5,859,375, fitted to 1,411 rows"));
  CHECK(has(page, "energy_kwh = 1.0221 · exp(3.21 + 0.84·ln(floor_area)"));
  CHECK(has(page, "RMSE 12,352 ± 613, in units of energy_kwh; chosen among 5,859,375"));
  CHECK(has(page, "mean error −12, predicted minus measured"));
  CHECK(has(page, "RMSE from 11,000 to 14,000 over 3 folds"));  // roots of 1.21e8 and 1.96e8
  CHECK(has(page, "√(101 − fill_percent) −0.1204 0.0101 0.0098"));
  CHECK(has(page, "AIC 30,508.1, AICc 30,508.1, BIC 30,529.1"));
  CHECK(has(page, "fails equal-spread"));
  CHECK(has(page, "statistic 14.2 on 1 df, p below 0.001, 0.001 after Holm's adjustment"));
  CHECK(has(page, "smearing (used) 1.022 −12 12,352"));
  CHECK(has(page, "floor_area seen from 120.5 to 48,210; form defined above 0"));
  CHECK(has(page, "fill_percent seen from 0 to 100; form defined up to 101"));
}

TEST_CASE("cli: a response as it is needs no way back", "[cli][unit]") {
  const std::string page = unwrapped(page_of(3, 80));
  CHECK(has(page, "nothing has to be transformed back"));
  CHECK_FALSE(has(page, "What does going back to own units cost?"));
  CHECK(has(page, "3 held-out predictions cannot be turned back"));
  CHECK(has(page, "RMSE undefined"));
}

TEST_CASE("cli: a caution that repeats a failed check is not printed again", "[cli][unit]") {
  judge::Shortlist shortlist = samples::shortlist();
  judge::Candidate& candidate = shortlist.candidates[1];
  candidate.cautions = {"Equal-spread fails: " + candidate.checks[0].size_words + ".", "Another caution."};
  const std::string page = unwrapped(candidate_page(shortlist, candidate, "a.run", plain_terminal(80)));
  CHECK_FALSE(has(page, "Equal-spread fails"));
  CHECK(has(page, "Another caution."));
}

TEST_CASE("cli: no candidate is printed with marks of significance", "[cli][unit]") {
  for (std::size_t index = 0; index < 4; ++index) CHECK_FALSE(has(page_of(index, 80), "*"));
}

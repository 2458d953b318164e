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
  CHECK(has(page, "broken equal-spread"));
  CHECK(has(page, "statistic 14.2 on 1 df, p below 0.001, 0.001 after Holm's adjustment"));
  CHECK(has(page, "One by one, size and p: ln(floor_area) 1.7 (p 0.003), √(101 − fill_percent) 1.1 (p 0.270)"));
  CHECK(has(page, "What may mend it: ln of the response"));
  CHECK(has(page, "smearing (used) 1.022 801 −12 12,352"));
  CHECK(has(page, "The uncorrected prediction is a median, 2.2 % below the mean"));
  CHECK(has(page, "CV+ 95 % 95.4 % 2.4 % 2.2 % 42,877"));
  CHECK(has(page, "CV+: judged on 5 of 10 folds"));
  CHECK(has(page, "10 % more floor_area goes with 8.3 % more energy_kwh"));
  CHECK(has(page, "18 0.0312 0.214 +4.87 0.002 −0.83 se ln(floor_area)"));
  CHECK(has(page, "Without line 18 rank 2 leads"));
  CHECK(has(page, "305 0.0101 0.094 −3.21 1.000 +0.41 se intercept"));
  CHECK(has(page, "a fit that a few rows cannot move has ln(floor_area) at 0.862"));
  CHECK(has(page, "floor_area seen from 120.5 to 48,210; form defined above 0"));
  CHECK(has(page, "fill_percent seen from 0 to 100; form defined up to 101"));
}

TEST_CASE("cli: a check that holds is not taken apart, and one of an earlier version has no verdict", "[cli][unit]") {
  CHECK_FALSE(has(unwrapped(page_of(0, 80)), "One by one"));
  judge::Shortlist shortlist = samples::shortlist();
  judge::Candidate& candidate = shortlist.candidates[0];
  candidate.checks[0].verdict.reset();
  const auto page = [&] { return unwrapped(candidate_page(shortlist, candidate, "a.run", plain_terminal(80))); };
  CHECK(has(page(), "passes equal-spread"));
  candidate.checks[0].p.reset();
  CHECK(has(page(), "untested equal-spread"));
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

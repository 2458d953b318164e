#include "announcement_view.hpp"
#include "lines.hpp"
#include "samples.hpp"
#include "shortlist_view.hpp"
#include "words.hpp"

#include <catch2/catch.hpp>

using namespace formsieve;
using namespace formsieve::cli;
using namespace formsieve::cli::testing;

TEST_CASE("cli: the shortlist fits every width from 40 columns on", "[cli][unit]") {
  for (const std::size_t width : {40U, 50U, 64U, 72U, 80U, 100U, 140U, 200U}) {
    CAPTURE(width);
    CHECK(widest_line(shortlist_page(samples::shortlist(), "coldstores.run", plain_terminal(width))) <= width);
  }
}

TEST_CASE("cli: the table in 80 columns puts the terms under the figures", "[cli][unit]") {
  const std::string page = shortlist_page(samples::shortlist(), "coldstores.run", plain_terminal(80));
  CHECK(has(page,
            "rank  response  CV RMSE ± se  ΔAIC  terms / coef.     R²  checks failing\n"
            "────────────────────────────────────────────────────────────────────────\n"
            "   1  ln(y)     12,343 ± 613   4.3          2 / 3  0.934  none\n"
            "      best: ln(floor_area) + √(101 − fill_percent)\n"
            "   2  ln(y)     12,352 ± 613   0.0          1 / 3  0.934  spread\n"
            "      recommended, lowest AIC: √(floor_area)\n"
            "   3  √(y)      12,378 ± 613  32.8          2 / 3  0.934  none\n"
            "      the terms of 1\n"
            "  41  y            undefined  92.9          0 / 3  0.934  none\n"
            "      simplest: no predictor, the mean alone\n"));
}

TEST_CASE("cli: lines on the front carry a dot, and families say how many they stand for", "[cli][unit]") {
  judge::Shortlist shortlist = samples::shortlist();
  shortlist.candidates[0].pareto = shortlist.candidates[3].pareto = true;
  shortlist.candidates[0].siblings = {"5", "6", shortlist.candidates[1].number};
  const std::string page = shortlist_page(shortlist, "coldstores.run", plain_terminal(80));
  CHECK(has(page,
            " • 1  ln(y)     12,343 ± 613   4.3          2 / 3  0.934  none\n"
            "      best: ln(floor_area) + √(101 − fill_percent) (+3 alike)\n"
            "   2  ln(y)     12,352 ± 613   0.0          1 / 3  0.934  spread\n"
            "      recommended, lowest AIC: √(floor_area) (alike to 1)\n"));
  CHECK(has(page, "• 41  y "));
  CHECK(has(unwrapped(page), "• no other line is as good by CV RMSE, number of terms and failing checks"));
  CHECK(has(unwrapped(page), "+ alike: so many candidates further down"));
  CHECK_FALSE(has(shortlist_page(samples::shortlist(), "a.run", plain_terminal(80)), "alike"));
  CHECK_FALSE(has(shortlist_page(samples::shortlist(), "a.run", plain_terminal(80)), "•"));
  for (const std::size_t width : {40U, 80U, 170U})
    CHECK(widest_line(shortlist_page(shortlist, "coldstores.run", plain_terminal(width))) <= width);
}

TEST_CASE("cli: a wide shortlist has one line a candidate", "[cli][unit]") {
  const std::string page = shortlist_page(samples::shortlist(), "coldstores.run", plain_terminal(170));
  CHECK(
      has(page, "   1  ln(y)     12,343 ± 613   4.3          2 / 3  0.934  none            best: ln(floor_area) + √("));
}

TEST_CASE("cli: the recommended equation is written out with its mean in own units", "[cli][unit]") {
  const std::string page = unwrapped(shortlist_page(samples::shortlist(), "coldstores.run", plain_terminal(80)));
  CHECK(has(page, "The recommended equation (rank 2) ln(energy_kwh) = 3.21 + 0.84·ln(floor_area)"));
  CHECK(has(page, "energy_kwh = 1.0221 · exp(3.21 + 0.84·ln(floor_area) − 0.12·√(101 − fill_percent))"));
}

TEST_CASE("cli: remarks, cautions and the next command are each said once", "[cli][unit]") {
  const std::string page = unwrapped(shortlist_page(samples::shortlist(), "cold stores.run", plain_terminal(80)));
  const auto once = [&](const std::string& sentence) {
    const std::size_t at = page.find(sentence);
    return at != std::string::npos && page.find(sentence, at + 1) == std::string::npos;
  };
  CHECK(once("differ in the form of floor_area"));
  CHECK(once("The winner's error is the smallest of 5,859,375"));
  CHECK(once("formsieve show 'cold stores.run' 2"));
}

TEST_CASE("cli: an empty shortlist is said to be empty", "[cli][unit]") {
  judge::Shortlist shortlist = samples::shortlist();
  shortlist.candidates.clear();
  CHECK(has(shortlist_page(shortlist, "a.run", plain_terminal(80)), "no candidate could be examined"));
}

TEST_CASE("cli: a search that was stopped says how far it came", "[cli][unit]") {
  judge::Shortlist shortlist = samples::shortlist();
  shortlist.space.scored = "1200000";
  shortlist.space.complete = false;
  const std::string page = unwrapped(shortlist_page(shortlist, "a.run", plain_terminal(80)));
  CHECK(has(page, "5,859,375 candidates, 1,200,000 scored before the search was stopped"));
}

TEST_CASE("cli: the criterion of the plan decides which difference is shown", "[cli][unit]") {
  judge::Shortlist shortlist = samples::shortlist();
  shortlist.criterion = shortlist.summary.criterion = judge::Criterion::bic;
  const std::string page = shortlist_page(shortlist, "a.run", plain_terminal(80));
  CHECK(has(page, "ΔBIC"));
  CHECK_FALSE(has(page, "ΔAIC"));
}

TEST_CASE("cli: the difference between two lists of terms names what changed", "[cli][unit]") {
  judge::Candidate reference, other;
  forms::Form ln, root;
  ln.kind = forms::Kind::ln;
  root.kind = forms::Kind::sqrt;
  reference.terms = {{"area", ln}, {"rain", {}}, {"fill", {}}};
  other.terms = {{"area", root}, {"fill", {}}, {"doors", ln}};
  CHECK(terms_difference(other, reference) == "with √(area) for ln(area); adding ln(doors); without rain");
  CHECK(terms_difference(reference, reference).empty());
}

TEST_CASE("cli: the announcement counts candidates exactly and lists its notes", "[cli][unit]") {
  pipeline::Announcement announcement;
  announcement.candidates = "12345678901234567";
  announcement.n_responses = 3;
  announcement.n_predictors = 9;
  announcement.n_forms = 36;
  announcement.rows_read = 420;
  announcement.rows_used = 411;
  announcement.folds = 10;
  announcement.seconds_estimate = 4.2;
  announcement.notes = {"log10 of floor_area is one form with ln"};
  CHECK(unwrapped(announcement_text(announcement, plain_terminal(60))) ==
        "12,345,678,901,234,567 candidates: 3 response forms × 9 predictors with 36 forms; 411 of 420 rows; 10 "
        "folds; about 4.2 s – log10 of floor_area is one form with ln");
}

TEST_CASE("cli: words for the shell are quoted only where needed", "[cli][unit]") {
  CHECK(shell_word("runs/a-b_1.run") == "runs/a-b_1.run");
  CHECK(shell_word("cold stores.run") == "'cold stores.run'");
  CHECK(shell_word("it's") == "'it'\\''s'");
  CHECK(shell_word("") == "''");
}

TEST_CASE("cli: an assumption that several checks find broken is named once", "[cli][unit]") {
  judge::Candidate candidate = samples::shortlist().candidates[0];
  candidate.checks.clear();
  for (const char* name : {"equal-spread", "straightness-by-term", "equal-spread-by-thirds", "no-single-row"}) {
    checks::Check check;
    check.name = name;
    check.passes = false;
    candidate.checks.push_back(check);
  }
  CHECK(failing_assumptions(candidate) == std::vector<std::string>{"spread", "straight", "single row"});
  candidate.checks[0].passes = candidate.checks[2].passes = true;
  CHECK(failing_assumptions(candidate) == std::vector<std::string>{"straight", "single row"});
}

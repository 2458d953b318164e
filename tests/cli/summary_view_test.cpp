#include "lines.hpp"
#include "samples.hpp"
#include "shortlist_view.hpp"
#include "summary_view.hpp"

#include <catch2/catch.hpp>

using namespace formsieve;
using namespace formsieve::cli;
using namespace formsieve::cli::testing;

namespace {

std::string tables(const judge::Shortlist& shortlist, std::size_t width = 80) {
  Page page(plain_terminal(width));
  summary_tables(page, shortlist, shortlist.candidates.front());
  return page.text();
}

/// The profile of a predictor with a form for each of the losses, the first loss that of leaving it out.
judge::PredictorProfile predictor(const std::string& name, const std::vector<double>& losses) {
  judge::PredictorProfile made;
  made.column = name;
  for (std::size_t i = 0; i < losses.size(); ++i) {
    judge::Reach reach;
    reach.cv_loss_rel = losses[i];
    std::optional<forms::Form> form;
    if (i > 0) form = forms::Form{forms::Kind::power, {static_cast<double>(i) + 0.5}};
    made.choices.push_back({form, {{{}, reach, {}}, {}, {}, {}}});
  }
  return made;
}

}  // namespace

TEST_CASE("cli: what each form costs is one line a predictor, dearest to leave out first", "[cli][unit]") {
  CHECK(has(tables(samples::shortlist()),
            "What each form costs, for ln(energy_kwh)\n"
            "predictor     best as     left out  weight  other forms\n"
            "────────────────────────────────────────────────────────────────────────────\n"
            "floor_area    ln(x)         +220 %    1.00  √(x) +3.1 %, untransformed +41 %\n"
            "fill_percent  √(101 − x)    +5.5 %    0.98  untransformed +1.2 %\n"));
}

TEST_CASE("cli: the error by number of terms stands beside the best and the lowest AIC", "[cli][unit]") {
  CHECK(has(tables(samples::shortlist()),
            "Error by number of terms, for ln(energy_kwh)\n"
            "terms   error     ΔAIC\n"
            "──────────────────────\n"
            "    0  +230 %  2,300.0\n"
            "    1  +5.5 %     55.0\n"
            "    2    best      0.0\n"));
}

TEST_CASE("cli: the tables hold for the response form of the chosen candidate", "[cli][unit]") {
  judge::Shortlist shortlist = samples::shortlist();
  shortlist.candidates.front().response = shortlist.responses[0];
  const std::string page = tables(shortlist);
  CHECK(has(page, "for energy_kwh\n"));
  CHECK(has(page, "floor_area    untransformed    +300 %    1.00  √(x) +2.0 %, ln(x) +4.0 %\n"));
}

TEST_CASE("cli: the tables say how many candidates they are exact over", "[cli][unit]") {
  judge::Shortlist shortlist = samples::shortlist();
  CHECK(has(unwrapped(tables(shortlist)), "exact over all 5,859,375 candidates"));
  shortlist.space.scored = "1200000";
  shortlist.space.complete = false;
  const std::string page = unwrapped(tables(shortlist));
  CHECK(has(page, "exact among the 1,200,000 candidates that were scored, of 5,859,375"));
  CHECK_FALSE(has(page, "over all"));
}

TEST_CASE("cli: a predictor that is best left out, and one that is always in, are said to be so", "[cli][unit]") {
  judge::Shortlist shortlist = samples::shortlist();
  shortlist.summary.predictors = {predictor("noise", {0.0, 0.0004, 0.002}), predictor("needed", {9.0, 0.1, 0.0})};
  shortlist.summary.predictors.push_back(predictor("kept", {0.0, 0.0}));
  shortlist.summary.predictors.back().always = true;
  shortlist.summary.predictors.back().choices.erase(shortlist.summary.predictors.back().choices.begin());
  const std::string page = unwrapped(tables(shortlist));
  CHECK(has(page, "kept x^1.5 always in needed x^2.5 +900 % x^1.5 +10 % noise left out best"));
  CHECK(has(page, "noise left out best x^1.5 +0.0 %, x^2.5 +0.2 %"));
}

TEST_CASE("cli: costly forms and predictors that cost little are counted, not listed, when there are many",
          "[cli][unit]") {
  judge::Shortlist shortlist = samples::shortlist();
  shortlist.summary.predictors = {predictor("many", {9.0, 0.7, 0.6, 0.5, 0.4, 0.3, 0.2, 0.1, 0.0})};
  CHECK(has(unwrapped(tables(shortlist)), "x^4.5 +40 %, x^3.5 +50 %, 2 more to +70 %"));
  CHECK_FALSE(has(tables(shortlist), "x^2.5 +60 %"));
  shortlist.summary.predictors = {predictor("six", {9.0, 0.6, 0.5, 0.4, 0.3, 0.2, 0.1, 0.0})};
  CHECK(has(unwrapped(tables(shortlist)), "x^2.5 +50 %, x^1.5 +60 %"));
  shortlist.summary.predictors.clear();
  for (int i = 0; i < 30; ++i)
    shortlist.summary.predictors.push_back(predictor("p" + std::to_string(i), {0.01 * i, 0.0}));
  const std::string page = tables(shortlist);
  CHECK(has(page, "p10 "));
  CHECK_FALSE(has(page, "p9 "));
  CHECK(has(page, "and 10 predictors more that cost at most 9.0 % to leave out."));
}

TEST_CASE("cli: of many numbers of terms those up to a little beyond the best are shown", "[cli][unit]") {
  judge::Shortlist shortlist = samples::shortlist();
  shortlist.summary.by_terms.clear();
  for (int i = 0; i <= 40; ++i) {
    judge::Reach reach;
    reach.cv_loss_rel = 0.01 * std::abs(i - 25);
    reach.criterion_loss = std::abs(i - 20);
    shortlist.summary.by_terms.push_back({static_cast<std::size_t>(i), {{{}, reach, {}}, {}, {}, {}}});
  }
  const std::string page = tables(shortlist);
  CHECK(has(page, "\n   14  "));
  CHECK(has(page, "\n   25    best  "));
  CHECK(has(page, "\n   27  "));
  CHECK_FALSE(has(page, "\n   13  "));
  CHECK_FALSE(has(page, "\n   28  "));
}

TEST_CASE("cli: a run without a summary has no tables of it", "[cli][unit]") {
  judge::Shortlist shortlist = samples::shortlist();
  shortlist.summary = {};
  CHECK(tables(shortlist).empty());
  CHECK(has(shortlist_page(samples::shortlist(), "a.run", plain_terminal(80)), "What each form costs"));
  CHECK_FALSE(has(shortlist_page(shortlist, "a.run", plain_terminal(80)), "What each form costs"));
}

TEST_CASE("cli: the tables fit every width from 40 columns on", "[cli][unit]") {
  judge::Shortlist shortlist = samples::shortlist();
  shortlist.summary.predictors.push_back(predictor("a_rather_long_name_of_a_column_indeed", {0.3, 0.7, 0.6, 0.5, 0.0}));
  for (const std::size_t width : {40U, 50U, 64U, 72U, 80U, 100U, 140U}) {
    CAPTURE(width);
    CHECK(widest_line(tables(shortlist, width)) <= width);
  }
}

TEST_CASE("cli: a stopped run has no column of weights", "[cli][unit]") {
  judge::Shortlist shortlist = samples::shortlist();
  for (judge::PredictorProfile& one : shortlist.summary.predictors) one.weight_share.reset();
  const std::string page = tables(shortlist);
  CHECK(has(page, "predictor     best as     left out  other forms\n"));
  CHECK_FALSE(has(page, "eight"));
}

TEST_CASE("cli: weights of noise are warned of where they mislead", "[cli][unit]") {
  judge::Shortlist shortlist = samples::shortlist();
  CHECK(has(unwrapped(tables(shortlist)), "pure noise"));
  shortlist.summary.criterion = judge::Criterion::bic;
  CHECK_FALSE(has(unwrapped(tables(shortlist)), "pure noise"));
  CHECK(has(tables(shortlist), "ΔBIC"));
}

#include "comparison_view.hpp"
#include "lines.hpp"
#include "samples.hpp"

#include <catch2/catch.hpp>

using namespace formsieve;
using namespace formsieve::cli;
using namespace formsieve::cli::testing;

namespace {

judge::PairComparison pair_of(std::size_t first, std::size_t second) {
  judge::PairComparison pair;
  pair.first = first;
  pair.second = second;
  pair.folds.t = 1.43;
  pair.folds.df = 9.0;
  pair.folds.p = 0.187;
  pair.folds.mse = 1.2e6;
  pair.folds.mse_se = 8.4e5;
  pair.folds.words = "Rank 2 has a higher CV RMSE, by 8.7 ± 34; that is no more than fold noise.";
  pair.likelihood.emplace();
  pair.likelihood->log_likelihood = -12.34;
  pair.likelihood->z = -1.52;
  pair.likelihood->z_aic = -1.61;
  pair.likelihood->z_bic = -1.98;
  pair.likelihood->words = "Row by row the likelihood speaks for rank 1: no more than noise between rows.";
  pair.disagreement.emplace();
  pair.disagreement->values = {{"floor_area", "48210"}, {"a column with a long name", ""}};
  pair.disagreement->words = "On a typical row they are 3,100 apart; most on line 212.";
  return pair;
}

judge::Comparison comparison() {
  judge::Comparison made;
  const judge::Shortlist shortlist = samples::shortlist();
  made.data = shortlist.data;
  made.folds = shortlist.folds;
  made.candidates = shortlist.candidates;
  made.candidates[1].checks[0].verdict = checks::Verdict::broken;
  made.bias.resize(4);
  for (auto& bias : made.bias) {
    bias.correction = "smearing";
    bias.words = "predicts 12 too little on average, 0.1 % of its CV RMSE: no more than chance leaves (± 650)";
  }
  for (std::size_t i = 0; i < 4; ++i)
    for (std::size_t j = i + 1; j < 4; ++j) made.pairs.push_back(pair_of(i, j));
  made.pairs[2].linear_log.emplace();
  made.pairs[2].linear_log->first_is_linear = false;
  made.pairs[2].linear_log->t_linear = 5.5;
  made.pairs[2].linear_log->p_linear = 1e-7;
  made.pairs[2].linear_log->words = "That speaks for rank 1.";
  made.cautions = {"The search chose these candidates by the errors that are compared here."};
  return made;
}

std::string page_of(const judge::Comparison& made, std::size_t width) {
  return comparison_page(made, "coldstores.run", plain_terminal(width));
}

}  // namespace

TEST_CASE("cli: a comparison fits every width from 40 columns on", "[cli][unit]") {
  for (const std::size_t width : {40U, 44U, 60U, 80U, 120U, 200U}) {
    CAPTURE(width);
    CHECK(widest_line(page_of(comparison(), width)) <= width);
  }
}

TEST_CASE("cli: a comparison lists only what differs and names the rest in one line", "[cli][unit]") {
  judge::Comparison made = comparison();
  made.candidates.resize(3);
  made.pairs = {pair_of(0, 1), pair_of(0, 2), pair_of(1, 2)};
  made.candidates[1].terms.push_back(made.candidates[0].terms[1]);
  const std::string page = page_of(made, 80);
  CHECK(has(page,
            "column      1      2      3\n"
            "───────────────────────────────\n"
            "response y  ln(y)  ln(y)  √(y)\n"
            "floor_area  ln(x)  √(x)   ln(x)\n"
            "Shared: √(101 − fill_percent).\n"));
}

TEST_CASE("cli: a comparison sets scores and checks side by side", "[cli][unit]") {
  const std::string page = unwrapped(page_of(comparison(), 100));
  CHECK(has(page, "Ranks 1 (best), 2 (recommended, lowest AIC), 3 and 41 (simplest)"));
  CHECK(has(page, "12,343 ± 613 0.934 30,512.4 30,533.4 3"));
  CHECK(has(page, "41 undefined"));
  CHECK(has(page, "equal-spread holds, 1.8 broken, 1.8 holds, 1.8 holds, 1.8"));
}

TEST_CASE("cli: every figure of a pair stands with a plain sentence, and none with a mark", "[cli][unit]") {
  const std::string page = unwrapped(page_of(comparison(), 100));
  CHECK(has(page, "1 and 2 Rank 2 has a higher CV RMSE, by 8.7 ± 34; that is no more than fold noise."));
  CHECK(has(page, "corrected resampled t 1.43 on 9 df, p 0.187"));
  CHECK(has(page, "Vuong z −1.52 uncorrected, −1.61 with the AIC penalty, −1.98 with the BIC penalty"));
  CHECK(has(page, "there floor_area = 48210, a column with a long name = ?"));
  CHECK(has(page,
            "Linear or log-linear? 1 and 41 That speaks for rank 1. PE test, t against the linear one 5.5 (p "
            "below 0.001), against the log-linear one none (p none)"));
  CHECK_FALSE(has(page, "*"));
}

TEST_CASE("cli: parts that need the table are left out where it is gone, and that is said first", "[cli][unit]") {
  judge::Comparison made = comparison();
  for (auto& pair : made.pairs) {
    pair.likelihood.reset();
    pair.linear_log.reset();
    pair.disagreement.reset();
  }
  made.missing = {"Shown is what the run folder holds."};
  const std::string page = page_of(made, 80);
  CHECK(has(page, "– Shown is what the run folder holds."));
  CHECK_FALSE(has(page, "Does the likelihood"));
  CHECK_FALSE(has(page, "Where do their predictions"));
  CHECK(has(page, "Is one more accurate than fold noise?"));
}

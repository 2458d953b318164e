#include "judge/judge.hpp"
#include "judge/picks.hpp"
#include "judge/words.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <limits>

namespace formsieve::judge {

namespace {

Candidate candidate(const std::string& number, std::optional<double> rmse, double aic, std::size_t coefficients,
                    double rmse_se = 1.0) {
  Candidate one;
  one.number = number;
  one.response_column = "energy_kwh";
  one.cv.rmse = rmse;
  if (rmse) one.cv.rmse_se = rmse_se;
  one.likelihood.aic = aic;
  one.likelihood.aicc = aic + 1.0;
  one.likelihood.bic = aic + 2.0 * static_cast<double>(coefficients);
  one.likelihood.n_parameters = coefficients + 1;
  return one;
}

std::vector<std::string> numbers(const std::vector<Candidate>& candidates) {
  std::vector<std::string> result;
  for (const Candidate& one : candidates) result.push_back(one.number);
  return result;
}

/// Number of the candidate with the mark; empty when there is none, "several" when it is not unique.
std::string marked(const std::vector<Candidate>& candidates, const std::string& mark) {
  std::string found;
  for (const Candidate& one : candidates)
    if (std::count(one.marks.begin(), one.marks.end(), mark) > 0) found = found.empty() ? one.number : "several";
  return found;
}

bool any_contains(const std::vector<std::string>& sentences, const std::string& part) {
  return std::any_of(sentences.begin(), sentences.end(),
                     [&](const std::string& sentence) { return sentence.find(part) != std::string::npos; });
}

}  // namespace

TEST_CASE("judge: candidate numbers compare as numbers of any length", "[judge][unit]") {
  CHECK(number_below("9", "10"));
  CHECK_FALSE(number_below("10", "9"));
  CHECK(number_below("99999999999999999999", "100000000000000000000"));
  CHECK_FALSE(number_below("7", "007"));
  CHECK_FALSE(number_below("007", "7"));
  CHECK(number_below("0", "1"));
  CHECK(number_below("18446744073709551615", "18446744073709551616"));
}

TEST_CASE("judge: rank orders by the criterion, ties by candidate number", "[judge][unit]") {
  std::vector<Candidate> all{candidate("100000000000000000000", 5.0, 3.0, 2), candidate("10", 5.0, 2.0, 2),
                             candidate("9", 5.0, 1.0, 2), candidate("3", 4.0, 9.0, 2)};
  rank(all, Criterion::cv_rmse, 0.02);
  CHECK(numbers(all) == std::vector<std::string>{"3", "9", "10", "100000000000000000000"});
  for (std::size_t i = 0; i < all.size(); ++i) CHECK(all[i].rank == i + 1);
  rank(all, Criterion::aic, 0.02);
  CHECK(numbers(all) == std::vector<std::string>{"9", "10", "100000000000000000000", "3"});
}

TEST_CASE("judge: rank does not depend on the order it is given", "[judge][property]") {
  std::vector<Candidate> all{candidate("1", 5.0, 3.0, 4), candidate("2", 5.0, 3.0, 3), candidate("3", 5.05, 1.0, 2),
                             candidate("4", std::nullopt, 0.0, 2), candidate("5", 5.04, 1.0, 2)};
  auto sorted = all;
  rank(sorted, Criterion::cv_rmse, 0.02);
  std::sort(all.begin(), all.end(), [](const Candidate& a, const Candidate& b) { return a.number < b.number; });
  do {
    auto copy = all;
    const auto said = rank(copy, Criterion::cv_rmse, 0.02);
    REQUIRE(numbers(copy) == numbers(sorted));
    for (std::size_t i = 0; i < copy.size(); ++i) REQUIRE(copy[i].marks == sorted[i].marks);
  } while (std::next_permutation(all.begin(), all.end(),
                                 [](const Candidate& a, const Candidate& b) { return a.number < b.number; }));
}

TEST_CASE("judge: a candidate without a CV error ranks last by it, but by its AIC otherwise", "[judge][unit]") {
  std::vector<Candidate> all{candidate("1", std::nullopt, -50.0, 3), candidate("2", 8.0, 4.0, 3),
                             candidate("3", 6.0, 9.0, 3)};
  const auto said = rank(all, Criterion::cv_rmse, 0.02);
  CHECK(numbers(all) == std::vector<std::string>{"3", "2", "1"});
  CHECK(marked(all, "lowest AIC") == "1");
  CHECK(marked(all, "recommended") == "3");
  CHECK(any_contains(said, "1 of 3 examined candidates has no cross-validated error"));
  CHECK(any_contains(said, "The lowest AIC (rank 3) belongs to one of them"));
  rank(all, Criterion::aic, 0.02);
  CHECK(numbers(all) == std::vector<std::string>{"1", "2", "3"});
}

TEST_CASE("judge: an infinite AICc ranks last by it", "[judge][unit]") {
  std::vector<Candidate> all{candidate("1", 5.0, 1.0, 9), candidate("2", 6.0, 2.0, 3)};
  all[0].likelihood.aicc = std::numeric_limits<double>::infinity();
  rank(all, Criterion::aicc, 0.02);
  CHECK(numbers(all) == std::vector<std::string>{"2", "1"});
  all[0].likelihood.bic = std::numeric_limits<double>::quiet_NaN();
  CHECK(criterion_value(all[0], Criterion::bic) == std::numeric_limits<double>::infinity());
}

TEST_CASE("judge: recommended is the lowest AIC within the near tie of the best CV error", "[judge][unit]") {
  // 10.2 is within 2 % of 10, 10.21 is not
  std::vector<Candidate> all{candidate("1", 10.0, 50.0, 6, 0.0), candidate("2", 10.2, 40.0, 4),
                             candidate("3", 10.21, 10.0, 4), candidate("4", 10.1, 45.0, 5)};
  const auto said = rank(all, Criterion::cv_rmse, 0.02);
  CHECK(marked(all, "best") == "1");
  CHECK(marked(all, "recommended") == "2");
  CHECK(marked(all, "lowest AIC") == "3");
  CHECK(any_contains(said, "Recommended is rank 3: its cross-validated error is 2 % above the lowest"));
  CHECK(any_contains(said, "its AIC is 10 lower"));
  rank(all, Criterion::cv_rmse, 0.0);
  CHECK(marked(all, "recommended") == "1");
}

TEST_CASE("judge: simplest has the fewest coefficients within one standard error of the best CV error",
          "[judge][unit]") {
  std::vector<Candidate> all{candidate("1", 10.0, 1.0, 6, 0.5), candidate("2", 10.5, 9.0, 3),
                             candidate("3", 10.4, 9.0, 3), candidate("4", 10.51, 9.0, 2), candidate("5", 10.4, 9.0, 3)};
  const auto said = rank(all, Criterion::cv_rmse, 0.02);
  CHECK(marked(all, "simplest") == "3");  // 3 coefficients: lowest CV first, then the lower number; 4 lies beyond
  CHECK(any_contains(said, "Simplest within one standard error is rank 2: 3 coefficients against 6"));
  CHECK(any_contains(said, "4 % above the lowest; one standard error is 5 %"));
}

TEST_CASE("judge: one candidate can carry every mark, and nothing is said of differences", "[judge][unit]") {
  std::vector<Candidate> all{candidate("8", 1.0, 1.0, 2), candidate("9", 9.0, 99.0, 5)};
  const auto said = rank(all, Criterion::cv_rmse, 0.02);
  CHECK(all[0].marks == std::vector<std::string>{"best", "recommended", "simplest", "lowest AIC"});
  CHECK_FALSE(any_contains(said, "Recommended is"));
  CHECK_FALSE(any_contains(said, "Simplest"));
  CHECK_FALSE(any_contains(said, "AIC judges"));
}

TEST_CASE("judge: different response forms of the best by AIC and by CV are said in words", "[judge][unit]") {
  std::vector<Candidate> all{candidate("1", 10.0, 50.0, 3), candidate("2", 12.0, 20.0, 3)};
  all[1].response.kind = forms::Kind::ln;
  const auto said = rank(all, Criterion::cv_rmse, 0.02);
  CHECK(any_contains(said, "The lowest AIC (rank 2) has ln(energy_kwh) as its response"));
  CHECK(any_contains(said, "the lowest cross-validated error (rank 1) has energy_kwh"));
  CHECK(any_contains(said, "equal-spread"));
  all[0].response.kind = forms::Kind::ln;
  CHECK_FALSE(any_contains(rank(all, Criterion::cv_rmse, 0.02), "as its response"));
}

TEST_CASE("judge: near ties are counted by CV error and by AIC", "[judge][unit]") {
  std::vector<Candidate> all{candidate("1", 10.0, 22.0, 3), candidate("2", 10.1, 20.0, 3),
                             candidate("3", 10.3, 24.0, 3), candidate("4", 11.0, 25.0, 3)};
  const auto said = rank(all, Criterion::cv_rmse, 0.02);
  CHECK(any_contains(said,
                     "Of 4 examined candidates, 2 lie within 2 % of the lowest cross-validated error, 2 within 2 "
                     "and 3 within 4 units of the lowest AIC"));
}

TEST_CASE("judge: without any CV error there is no best by it, and no recommendation", "[judge][unit]") {
  std::vector<Candidate> all{candidate("2", std::nullopt, 5.0, 3), candidate("1", std::nullopt, 7.0, 3)};
  const auto said = rank(all, Criterion::cv_rmse, 0.02);
  CHECK(numbers(all) == std::vector<std::string>{"1", "2"});
  CHECK(marked(all, "best").empty());
  CHECK(marked(all, "recommended").empty());
  CHECK(marked(all, "simplest").empty());
  CHECK(marked(all, "lowest AIC") == "2");
  CHECK(any_contains(said, "2 of 2 examined candidates have no cross-validated error"));
}

TEST_CASE("judge: ranking nothing says so", "[judge][unit]") {
  std::vector<Candidate> none;
  CHECK(any_contains(rank(none, Criterion::cv_rmse, 0.02), "No candidate"));
}

TEST_CASE("judge: ranking twice leaves each mark once", "[judge][unit]") {
  std::vector<Candidate> all{candidate("1", 10.0, 5.0, 3), candidate("2", 10.1, 4.0, 2)};
  rank(all, Criterion::cv_rmse, 0.02);
  rank(all, Criterion::cv_rmse, 0.02);
  CHECK(marked(all, "best") == "1");
  CHECK(marked(all, "recommended") == "2");
  CHECK(all[1].marks == std::vector<std::string>{"recommended", "simplest", "lowest AIC"});
}

TEST_CASE("judge: names go to the first of each order that is admitted, and no more than needed is asked",
          "[judge][unit]") {
  std::vector<Candidate> all{candidate("1", 10.0, 50.0, 6, 2.0), candidate("2", 10.5, 49.0, 6),
                             candidate("3", 10.6, 48.0, 6), candidate("4", 11.5, 47.0, 2),
                             candidate("5", 99.0, 10.0, 6)};
  put_in_order(all, Criterion::cv_rmse);
  std::vector<std::size_t> asked;
  (void)name_lines(all, Criterion::cv_rmse, 0.02, [&](std::size_t i) {
    asked.push_back(i);
    return i != 0 && i != 4;
  });
  CHECK(all[0].marks.empty());
  CHECK(all[4].marks.empty());
  CHECK(all[1].marks == std::vector<std::string>{"best"});
  CHECK(all[2].marks == std::vector<std::string>{"recommended"});  // within 2 % of 10.5
  CHECK(all[3].marks == std::vector<std::string>{"simplest", "lowest AIC"});
  CHECK(std::count(asked.begin(), asked.end(), 2U) == 1);
}

TEST_CASE("judge: numbers are written for reading", "[judge][unit]") {
  CHECK(number_words(-0.012345) == "−0.0123");
  CHECK(number_words(12345.6) == "12,346");
  CHECK(exact_words(100.5) == "100.5");
  CHECK(percent_words(0.02) == "2 %");
  CHECK(percent_words(0.1234) == "12 %");
  CHECK(percent_words(0.997) == "99.7 %");
  CHECK(percent_words(0.00841) == "0.84 %");
  CHECK(grouped_digits("1234567890") == "1,234,567,890");
  CHECK(grouped_digits("123") == "123");
  CHECK(counted(1, "row") == "1 row");
  CHECK(counted(2000, "row") == "2,000 rows");
}

}  // namespace formsieve::judge

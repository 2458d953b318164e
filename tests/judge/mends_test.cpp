// What may mend a check that does not hold. No outside reference: the rule is the program's own.
#include "judge/judge.hpp"

#include <catch2/catch.hpp>

namespace formsieve::judge {

namespace {

using checks::Verdict;

checks::Check check(const std::string& name, std::optional<Verdict> verdict) {
  checks::Check made;
  made.name = name;
  made.verdict = verdict;
  made.passes = verdict != Verdict::broken;
  made.parts = {{"ln(rain)", {}, 0.4, 0.001}, {"fill", {}, 0.0001, 0.02}};
  return made;
}

forms::Form form(forms::Kind kind) {
  forms::Form made;
  made.kind = kind;
  return made;
}

/// rain and fill, with this response and form of fill; `name` comes to this verdict.
Candidate one(std::size_t rank, forms::Kind response, forms::Kind fill, const std::string& name, Verdict verdict,
              double rmse) {
  Candidate made;
  made.rank = rank;
  made.number = std::to_string(100 + rank);
  made.response_column = "energy";
  made.response = form(response);
  made.terms = {{"rain", form(forms::Kind::ln)}, {"fill", form(fill)}};
  made.checks = {check(name, verdict)};
  made.cv.rmse = rmse;
  return made;
}

}  // namespace

TEST_CASE("judge: a check that holds or was not made needs no mending", "[judge][unit]") {
  const std::vector<Candidate> listed = {
      one(1, forms::Kind::ln, forms::Kind::identity, "equal-spread", Verdict::holds, 10.0),
      one(2, forms::Kind::sqrt, forms::Kind::identity, "equal-spread", Verdict::holds, 10.0)};
  CHECK(mends(listed[0], listed[0].checks[0], listed).empty());
  CHECK(mends(listed[0], check("equal-spread", std::nullopt), listed).empty());
}

TEST_CASE("judge: the best-ranked candidate with another response form mends a spread", "[judge][unit]") {
  const std::vector<Candidate> listed = {
      one(1, forms::Kind::identity, forms::Kind::identity, "equal-spread", Verdict::broken, 10.0),
      one(2, forms::Kind::sqrt, forms::Kind::identity, "equal-spread", Verdict::strained, 10.1),
      one(3, forms::Kind::ln, forms::Kind::identity, "equal-spread", Verdict::holds, 10.2),
      one(4, forms::Kind::ln, forms::Kind::sqrt, "equal-spread", Verdict::holds, 10.3)};
  CHECK(mends(listed[0], listed[0].checks[0], listed) ==
        std::vector<std::string>{"the response as ln(energy): rank 3 holds, with a cross-validated error 2 % higher."});
}

TEST_CASE("judge: another form of the term that bends most is named", "[judge][unit]") {
  const std::vector<Candidate> listed = {
      one(1, forms::Kind::ln, forms::Kind::identity, "straightness-by-term", Verdict::strained, 10.0),
      one(2, forms::Kind::ln, forms::Kind::sqrt, "straightness-by-term", Verdict::holds, 9.0)};
  CHECK(mends(listed[0], listed[0].checks[0], listed) ==
        std::vector<std::string>{"√(fill) for fill: rank 2 holds, with a cross-validated error 10 % lower."});
}

TEST_CASE("judge: where no candidate holds, what is usually done is said", "[judge][unit]") {
  std::vector<Candidate> listed = {
      one(1, forms::Kind::ln, forms::Kind::identity, "equal-spread", Verdict::broken, 10.0)};
  auto said = mends(listed[0], listed[0].checks[0], listed);
  REQUIRE(said.size() == 1);
  CHECK(said[0].find("data.weight") != std::string::npos);
  CHECK(said[0].find("thirds") == std::string::npos);
  listed[0].back.corrections.resize(2);
  listed[0].back.corrections[0].method = "smearing";
  listed[0].back.corrections[0].cv_bias = -12.0;
  listed[0].back.corrections[1].method = "smearing by thirds";
  listed[0].back.corrections[1].cv_bias = 3.0;
  said = mends(listed[0], listed[0].checks[0], listed);
  REQUIRE(said.size() == 1);
  CHECK(said[0].find("smearing by thirds of the fitted value leaves less held-out bias (3 for −12)") !=
        std::string::npos);
}

}  // namespace formsieve::judge

#include "made_shortlist.hpp"

#include <formsieve/report.hpp>

#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include <cmath>
#include <fstream>
#include <limits>
#include <string>

using namespace formsieve;
using nlohmann::ordered_json;

namespace {

/// The example of the contract, copied from the design.
ordered_json contract() {
  std::ifstream in(FORMSIEVE_SOURCE_DIR "/tests/report/contract.json");
  return ordered_json::parse(in);
}

judge::Shortlist read_back(const std::string& text) {
  auto shortlist = report::read_shortlist_json(text, "a.run/shortlist.json");
  if (!shortlist) FAIL(shortlist.error().message);
  return *std::move(shortlist);
}

/// Every key of `wanted` is in `found`, with a value of the same kind; null stands for a number that is not there.
void same_shape(const ordered_json& wanted, const ordered_json& found, const std::string& path) {
  INFO(path);
  if (wanted.is_object()) {
    REQUIRE(found.is_object());
    for (const auto& [key, value] : wanted.items()) {
      INFO(key);
      REQUIRE(found.contains(key));
      same_shape(value, found.at(key), path + "." + key);
    }
  } else if (wanted.is_array()) {
    REQUIRE(found.is_array());
    REQUIRE_FALSE(found.empty());
    for (const auto& item : found) same_shape(wanted.at(0), item, path + "[]");
  } else if (wanted.is_number() || wanted.is_null()) {
    CHECK((found.is_number() || found.is_null()));
  } else {
    CHECK(found.type() == wanted.type());
  }
}

}  // namespace

TEST_CASE("report: shortlist reads back whole when written", "[report][property]") {
  for (std::uint64_t seed = 0; seed < 500; ++seed) {
    INFO("seed " << seed);
    const judge::Shortlist made = test::made_shortlist(seed);
    const std::string text = report::shortlist_json(made);
    const judge::Shortlist again = read_back(text);
    REQUIRE(test::print_out(again) == test::print_out(made));
    REQUIRE(report::shortlist_json(again) == text);
  }
}

TEST_CASE("report: shortlist has every key of the contract", "[report][golden]") {
  const auto written = ordered_json::parse(report::shortlist_json(test::plain_shortlist()));
  same_shape(contract(), written, "");
  CHECK(written.at("schema") == 1);
  CHECK(written.at("space").at("candidates") == "1234567890");
  CHECK(written.at("shortlist").at(0).at("rank") == 1);
  CHECK(written.at("shortlist").at(0).at("terms").at(1).at("reflect") == 101.0);
  CHECK(written.at("shortlist").at(0).at("terms").at(1).at("form") == "sqrt");
  CHECK(written.at("shortlist").at(0).at("cv").at("rmse") == 1234.5);
  CHECK(written.at("shortlist").at(1).at("cv").at("rmse").is_null());
  CHECK(written.at("picks") == ordered_json{{"best", 1}, {"recommended", 1}, {"simplest", 2}});
  CHECK(written.begin().key() == "formsieve");
}

TEST_CASE("report: shortlist of the contract alone can be read", "[report][unit]") {
  const judge::Shortlist shortlist = read_back(contract().dump());
  REQUIRE(shortlist.candidates.size() == 1);
  CHECK(shortlist.data.rows_used == 411);
  CHECK(shortlist.candidates[0].response.kind == forms::Kind::ln);
  CHECK(shortlist.candidates[0].response_column == "energy_kwh");
  CHECK(shortlist.candidates[0].terms.at(0).column == "floor_area");
  CHECK(shortlist.candidates[0].back.smearing_factor == 1.03);
  CHECK(shortlist.criterion == judge::Criterion::cv_rmse);
  CHECK(shortlist.space.complete);
}

TEST_CASE("report: shortlist parameter is null, a number or a list", "[report][unit]") {
  judge::Shortlist s = test::plain_shortlist();
  s.candidates.resize(1);
  auto& terms = s.candidates[0].terms;
  terms[0].form.kind = forms::Kind::box_cox;
  terms[0].form.parameters = {0.3};
  terms[1].form.kind = forms::Kind::fractional_polynomial;
  terms[1].form.parameters = {0.5, 2};
  const auto written = ordered_json::parse(report::shortlist_json(s)).at("shortlist").at(0);
  CHECK(written.at("response").at("parameter").is_null());
  CHECK(written.at("terms").at(0).at("parameter") == 0.3);
  CHECK(written.at("terms").at(1).at("parameter") == ordered_json{0.5, 2.0});
}

TEST_CASE("report: shortlist keeps the levels of a text column and an infinite AICc", "[report][unit]") {
  judge::Shortlist s = test::plain_shortlist();
  forms::Form levels;
  levels.kind = forms::Kind::levels;
  levels.levels = {"brine", "air", "others"};
  levels.pooled = {"ice", "straw"};
  s.candidates[0].terms.push_back({"cooling", levels});
  s.candidates[0].likelihood.aicc = std::numeric_limits<double>::infinity();
  const judge::Shortlist again = read_back(report::shortlist_json(s));
  CHECK(again.candidates[0].terms.back().form == levels);
  CHECK(std::isinf(again.candidates[0].likelihood.aicc));
  CHECK(again.candidates[0].ranges.at(0).defined.upper == std::numeric_limits<double>::infinity());
  CHECK(again.candidates[0].ranges.at(0).defined.lower == 0.0);
}

TEST_CASE("report: shortlist text does not depend on the time taken", "[report][unit]") {
  judge::Shortlist s = test::plain_shortlist();
  s.space.seconds = 1.25;
  const std::string first = report::shortlist_json(s);
  s.space.seconds = 77.5;
  CHECK(report::shortlist_json(s) == first);
  CHECK(first.find("seconds") == std::string::npos);
}

TEST_CASE("report: shortlist with bytes that are not UTF-8 is still JSON", "[report][unit]") {
  judge::Shortlist s = test::plain_shortlist();
  s.data.file =
      "fl\xe4"
      "che.csv";
  const std::string text = report::shortlist_json(s);
  CHECK(read_back(text).data.file ==
        "fl\xEF\xBF\xBD"
        "che.csv");
}

TEST_CASE("report: shortlist seeds beyond 2^53 are text, smaller ones numbers", "[report][unit]") {
  judge::Shortlist s = test::plain_shortlist();
  s.folds.seed = 18446744073709551615u;
  CHECK(ordered_json::parse(report::shortlist_json(s)).at("folds").at("seed") == "18446744073709551615");
  CHECK(read_back(report::shortlist_json(s)).folds.seed == 18446744073709551615u);
  s.folds.seed = 20261201;
  CHECK(ordered_json::parse(report::shortlist_json(s)).at("folds").at("seed") == 20261201);
}

TEST_CASE("report: shortlist says what each form costs, number by number", "[report][golden]") {
  const auto written = ordered_json::parse(report::shortlist_json(test::plain_shortlist()));
  CHECK(written.at("summary_criterion") == "aic");
  const auto& response = written.at("response_profile").at(1);
  CHECK(response.at("form") == "ln");
  CHECK(response.at("weight_share") == 0.75);
  CHECK(response.at("cv_rmse_form_scale") == 0.25);
  const auto& predictor = written.at("form_profile").at(0);
  CHECK(predictor.at("column") == "floor_area");
  CHECK(predictor.at("weight_share") == 0.875);
  const auto& untransformed = predictor.at("choices").at(0);
  CHECK(untransformed.at("form") == "identity");
  CHECK(untransformed.at("criterion") == 650.5);
  CHECK(untransformed.at("criterion_loss") == 50.0);
  CHECK(untransformed.at("weight_share") == 0.5);
  CHECK(untransformed.at("by_response").at(0) ==
        ordered_json{{"cv_rmse_form_scale", 120.0}, {"cv_loss", 0.5}, {"criterion", 650.5}, {"criterion_loss", 50.0}});
  const auto& left_out = predictor.at("choices").at(2);
  CHECK(left_out.at("form").is_null());
  CHECK(left_out.at("by_response").at(1).at("cv_loss").is_null());
  CHECK(written.at("by_terms").at(0).at("terms") == 0);
  CHECK(written.at("by_terms").at(0).at("by_response").at(1).at("cv_loss") == 2.0);
  CHECK(written.at("score_distribution").at(0) ==
        ordered_json{{"cv_rmse_form_scale", {0.0, 100.0, 200.0}}, {"candidates", {3, 5}}});
  CHECK(written.at("score_distribution").at(1).at("cv_rmse_form_scale").at(1).is_null());
}

TEST_CASE("report: shortlist without a summary has no keys of one and reads back without it", "[report][unit]") {
  judge::Shortlist s = test::plain_shortlist();
  s.summary = {};
  const std::string text = report::shortlist_json(s);
  const auto written = ordered_json::parse(text);
  for (const char* key : {"summary_criterion", "response_profile", "form_profile", "by_terms", "score_distribution"})
    CHECK_FALSE(written.contains(key));
  CHECK(read_back(text).summary.empty());
}

// models.json written and read back; values as text.
#include "report/value_text.hpp"

#include <formsieve/report.hpp>

#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <limits>
#include <random>

namespace formsieve::report::test {

namespace {

model::ModelSet made_set() {
  model::Model model;
  model.rank = 3;
  model.number = "123456789012345678901234567890";
  model.marks = {"recommended", "lowest AIC"};
  model.equation = "ln(y) = 1 + 2·√(101 − x)";
  model.response = {forms::Kind::ln, {}, {}, 0.5};
  model.terms = {{"x",
                  {forms::Kind::sqrt, {}, 101.0},
                  0.1,
                  1.0 / 3.0,
                  {-std::numeric_limits<double>::infinity(), 101.0, false, true}},
                 {"kind", {forms::Kind::levels, {}, {}, 0.0, {"a", "b\"c"}, {"rare"}}, 0.0, 0.0, {}}};
  model.coefficients = {0.1, 1e-300, -7.0};
  model.root = {1.0, 2.0, 3.0, 4.0, 5.0, 6.0};
  model.sigma = 0.1 + 0.2;
  model.n = 31;
  model.largest_leverage = 0.3;
  model::MeanPart part;
  part.smallest = -0.4;
  part.mean_exp = 1.01;
  part.residuals = {-0.4, 0.1, 0.3};
  model::MeanPart factor;
  factor.factor = 1.5;
  model.mean = {"smearing by thirds", {2.0}, {part, factor}};
  model.folds = {{{1.0, 2.0, 3.0}, {0.1, 0.2}, {}}, {{1.5, 2.5, 3.5}, {0.3}, {7}}};
  return {"0.1.0", "y", "w", {model, model}};
}

}  // namespace

TEST_CASE("report: models.json reads back as it was written, to the byte", "[report][property]") {
  const std::string text = models_json(made_set());
  const auto read = read_models_json(text, "models.json");
  REQUIRE(read.ok());
  CHECK(models_json(*read) == text);
  REQUIRE(read->models.size() == 2);
  const model::Model& model = read->models[1];
  CHECK(model.sigma == 0.1 + 0.2);
  CHECK(model.coefficients == std::vector<double>{0.1, 1e-300, -7.0});
  CHECK(model.terms[0].seen_max == 1.0 / 3.0);
  CHECK(model.terms[1].form.pooled == std::vector<std::string>{"rare"});
  CHECK(model.folds[1].counts == std::vector<std::uint64_t>{7});
  CHECK(*model.mean.parts[1].factor == 1.5);
  CHECK(read->weight == "w");
}

TEST_CASE("report: models.json keeps its keys", "[report][golden]") {
  const auto json = nlohmann::json::parse(models_json(made_set()));
  for (const char* key : {"formsieve", "schema", "response", "weight", "models"}) CHECK(json.contains(key));
  const auto& model = json.at("models").at(0);
  for (const char* key : {"rank", "candidate", "marks", "equation", "response", "terms", "coefficients", "root",
                          "sigma", "n", "largest_leverage", "mean", "folds"})
    CHECK(model.contains(key));
  for (const char* key : {"column", "form", "parameter", "reflect", "shift", "seen_min", "seen_max", "defined"})
    CHECK(model.at("terms").at(0).contains(key));
}

TEST_CASE("report: a broken models.json is refused with its place", "[report][unit]") {
  const std::string text = models_json(made_set());
  CHECK_FALSE(read_models_json(text.substr(0, text.size() / 2), "m.json").ok());
  CHECK_FALSE(read_models_json("[1, 2]", "m.json").ok());
  auto json = nlohmann::json::parse(text);
  json["schema"] = 2;
  CHECK_THAT(read_models_json(json.dump(), "m.json").error().message, Catch::Contains("schema"));
  json = nlohmann::json::parse(text);
  json["models"][1].erase("sigma");
  CHECK_THAT(read_models_json(json.dump(), "m.json").error().message, Catch::Contains("models[1].sigma"));
  json = nlohmann::json::parse(text);
  json["models"][0]["terms"][0]["form"] = "cosine";
  CHECK_THAT(read_models_json(json.dump(), "m.json").error().message, Catch::Contains("cosine"));
}

TEST_CASE("report: values are written with ten significant digits", "[report][property]") {
  const auto written = [](double value) {
    char text[kValueBytes];
    return std::string(text, write_value(text, value));
  };
  CHECK(written(0.0) == "0");
  CHECK(written(-0.0) == "0");
  CHECK(written(1.0) == "1");
  CHECK(written(-120.0) == "-120");
  CHECK(written(0.00001) == "0.00001");
  CHECK(written(9.99999999999) == "10");
  CHECK(written(99999999999.0) == "100000000000");
  CHECK(written(1234.5) == "1234.5");
  CHECK(written(1e20) == "1e+20");
  std::mt19937_64 random(5);
  std::uniform_real_distribution<double> exponent(-320.0, 308.0);
  std::uniform_real_distribution<double> near(-6.0, 16.0);
  for (int i = 0; i < 200000; ++i) {
    const double value = (i % 2 == 0 ? 1.0 : -1.0) * std::pow(10.0, i % 4 < 2 ? near(random) : exponent(random));
    const std::string text = written(value);
    REQUIRE(text.size() <= kValueBytes);
    char plain[64];
    std::snprintf(plain, sizeof plain, "%.9e", value);
    REQUIRE(std::strtod(text.c_str(), nullptr) == std::strtod(plain, nullptr));
  }
}

TEST_CASE("report: cells are quoted only where they need it", "[report][unit]") {
  const auto cell = [](std::string_view text) {
    std::string written;
    append_cell(written, text);
    return written;
  };
  CHECK(cell("plain text") == "plain text");
  CHECK(cell("a,b") == "\"a,b\"");
  CHECK(cell("say \"x\"\nnow") == "\"say \"\"x\"\"\nnow\"");
  std::string json;
  append_json_string(json, "a\"b\n\xff");
  CHECK(json == "\"a\\\"b\\n\xEF\xBF\xBD\"");
}

}  // namespace formsieve::report::test

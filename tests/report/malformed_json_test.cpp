#include "made_shortlist.hpp"

#include <formsieve/report.hpp>

#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include <cstdint>
#include <fstream>
#include <string>
#include <vector>

using namespace formsieve;
using nlohmann::json;

namespace {

json contract() {
  std::ifstream in(FORMSIEVE_SOURCE_DIR "/tests/report/contract.json");
  return json::parse(in);
}

Error refused(const std::string& text) {
  const auto shortlist = report::read_shortlist_json(text, "a.run/shortlist.json");
  REQUIRE_FALSE(shortlist.ok());
  CHECK(shortlist.error().kind == ErrorKind::data);
  CHECK(shortlist.error().where == "a.run/shortlist.json");
  CHECK_FALSE(shortlist.error().hint.empty());
  return shortlist.error();
}

/// Pointers to every value below `node`, and their paths as messages write them.
void all_paths(const json& node, const json::json_pointer& at, const std::string& path,
               std::vector<std::pair<json::json_pointer, std::string>>& out) {
  if (node.is_object())
    for (const auto& [key, value] : node.items()) {
      const std::string longer = path.empty() ? key : path + "." + key;
      out.emplace_back(at / key, longer);
      all_paths(value, at / key, longer, out);
    }
  if (node.is_array())
    for (std::size_t i = 0; i < node.size(); ++i) all_paths(node[i], at / i, path + "[" + std::to_string(i) + "]", out);
}

std::vector<std::pair<json::json_pointer, std::string>> contract_paths() {
  std::vector<std::pair<json::json_pointer, std::string>> paths;
  all_paths(contract(), json::json_pointer(), "", paths);
  return paths;
}

}  // namespace

TEST_CASE("report: shortlist names the key when one of the contract is missing", "[report][unit]") {
  const auto paths = contract_paths();
  REQUIRE(paths.size() > 60);
  for (const auto& [pointer, path] : paths) {
    if (path == "formsieve" || path == "shortlist[0].cautions[0]") continue;
    INFO(path);
    json changed = contract();
    changed.at(pointer.parent_pointer()).erase(pointer.back());
    if (path == "shortlist[0].cautions[0]") continue;
    const Error error = refused(changed.dump());
    CHECK(error.message == "'" + path + "' is missing");
  }
}

TEST_CASE("report: shortlist names the key when its value is of a wrong type", "[report][unit]") {
  for (const auto& [pointer, path] : contract_paths()) {
    INFO(path);
    json changed = contract();
    // Neither an object nor a list, and true only where nothing else is allowed.
    changed.at(pointer) = changed.at(pointer).is_boolean() ? json(3) : json(true);
    const Error error = refused(changed.dump());
    CHECK_THAT(error.message, Catch::StartsWith("'" + path + "'"));
  }
}

TEST_CASE("report: shortlist of another schema or program is told apart", "[report][unit]") {
  json changed = contract();
  changed["schema"] = 2;
  changed["formsieve"] = "7.0.0";
  changed.erase("data");
  CHECK_THAT(refused(changed.dump()).message, Catch::Contains("'schema' is 2") && Catch::Contains("7.0.0"));
  for (const char* text : {"[]", "3", "null", "{}", "\"formsieve\"", "{\"schema\": 1}"})
    CHECK_THAT(refused(text).message, Catch::Contains("not a shortlist"));
}

TEST_CASE("report: shortlist refuses unknown forms and counts that are none", "[report][unit]") {
  const auto with = [](const char* pointer, const json& value) {
    json changed = contract();
    changed[json::json_pointer(pointer)] = value;
    return changed.dump();
  };
  CHECK_THAT(refused(with("/shortlist/0/terms/0/form", "tangent")).message,
             Catch::Contains("'shortlist[0].terms[0].form' is 'tangent'"));
  for (const char* form : {"power", "spline", "levels", "fractional-polynomial"})
    CHECK_THAT(refused(with("/shortlist/0/terms/0/form", form)).message, Catch::Contains("does not go with"));
  CHECK_THAT(refused(with("/shortlist/0/response/parameter", 2)).message, Catch::Contains("does not go with"));
  CHECK_THAT(refused(with("/data/rows_used", -1)).message, Catch::Contains("'data.rows_used'"));
  CHECK_THAT(refused(with("/data/rows_used", 1.5)).message, Catch::Contains("'data.rows_used'"));
  CHECK_THAT(refused(with("/folds/seed", "12x")).message, Catch::Contains("'folds.seed'"));
  CHECK_THAT(refused(with("/criterion", "r2")).message, Catch::Contains("'criterion' is 'r2'"));
}

TEST_CASE("report: shortlist says where the text stops being JSON", "[report][unit]") {
  CHECK_THAT(refused("{\n  \"formsieve\": \"0.1.0\",\n  oops\n}").message, Catch::Contains("line 3, column 3"));
  CHECK_THAT(refused("").message, Catch::Contains("not JSON"));
  CHECK_THAT(refused("{\"formsieve\": 1e999}").message, Catch::Contains("out of range"));
  CHECK_THAT(refused(std::string("\0\0", 2)).message, Catch::Contains("line 1, column 1"));
}

TEST_CASE("report: shortlist cut short anywhere is refused", "[report][property]") {
  const std::string text = report::shortlist_json(test::plain_shortlist());
  const std::size_t end = text.rfind('}');
  for (std::size_t length = 0; length <= end; length += 7) {
    INFO(length);
    REQUIRE_FALSE(report::read_shortlist_json(text.substr(0, length), "x").ok());
  }
}

TEST_CASE("report: shortlist never crashes on arbitrary bytes", "[report][property]") {
  const std::string good = report::shortlist_json(test::made_shortlist(7));
  std::uint64_t state = 99;
  const auto next = [&] { return (state = state * 6364136223846793005u + 1442695040888963407u) >> 33; };
  std::size_t refusals = 0;
  for (int round = 0; round < 3000; ++round) {
    std::string bytes = good;
    for (std::uint64_t k = next() % 3 + 1; k > 0; --k) {
      const std::size_t at = next() % bytes.size();
      if (next() % 2 == 0)
        bytes[at] = static_cast<char>(next());
      else
        bytes.insert(at, 1, "[]{}\",:0-e.tn\\"[next() % 14]);
    }
    const auto shortlist = report::read_shortlist_json(bytes, "x");
    if (shortlist.ok()) continue;
    ++refusals;
    CHECK_FALSE(shortlist.error().message.empty());
  }
  CHECK(refusals > 500);
  for (const std::string& deep :
       {std::string(300'000, '['), "{\"formsieve\":" + std::string(300'000, '[') + std::string(300'000, ']') + "}"})
    CHECK_FALSE(report::read_shortlist_json(deep, "x").ok());
}

TEST_CASE("report: shortlist whose summary does not fit its response forms is refused", "[report][unit]") {
  const json whole = json::parse(report::shortlist_json(test::plain_shortlist()));
  const auto message = [&](const char* pointer, const json& value) {
    json changed = whole;
    changed.at(json::json_pointer(pointer)) = value;
    return refused(changed.dump()).message;
  };
  CHECK(message("/response_profile", json::array()) ==
        "'response_profile' has 0 entries, and must have one for each of 2 response forms");
  CHECK(message("/by_terms/1/by_response", json::array()) ==
        "'by_terms[1].by_response' has 0 entries, and must have one for each of 2 response forms");
  CHECK(message("/score_distribution/0/candidates", json::array({3})) ==
        "'score_distribution[0].cv_rmse_form_scale' has 3 entries, and must have one more than 'candidates'");
  CHECK_THAT(message("/form_profile/0/choices/1/form", "lin"), Catch::Contains("not a form"));
}

TEST_CASE("report: shortlist names the key when one of a summary is missing or wrong", "[report][unit]") {
  const json whole = json::parse(report::shortlist_json(test::plain_shortlist()));
  for (const char* top : {"response_profile", "form_profile", "by_terms", "score_distribution"}) {
    std::vector<std::pair<json::json_pointer, std::string>> paths;
    all_paths(whole.at(top), json::json_pointer("/" + std::string(top)), top, paths);
    REQUIRE(paths.size() >= 4);
    for (const auto& [pointer, path] : paths) {
      INFO(path);
      // the forms there repeat "response_forms" for the reader of the file
      const std::string key = pointer.back();
      if (path.starts_with("response_profile") &&
          (key == "form" || key == "parameter" || key == "reflect" || key == "shift"))
        continue;
      json missing = whole;
      missing.at(pointer.parent_pointer()).erase(pointer.back());
      CHECK(refused(missing.dump()).message == "'" + path + "' is missing");
      json wrong = whole;
      wrong.at(pointer) = wrong.at(pointer).is_boolean() ? json(3) : json(true);
      CHECK_THAT(refused(wrong.dump()).message, Catch::StartsWith("'" + path + "'"));
    }
  }
  json missing = whole;
  missing.erase("by_terms");
  CHECK(refused(missing.dump()).message == "'by_terms' is missing");
}

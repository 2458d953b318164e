#include "made_shortlist.hpp"

#include <formsieve/report.hpp>

#include <catch2/catch.hpp>

#include <algorithm>
#include <string>
#include <vector>

using namespace formsieve;

namespace {

/// A plain reader of RFC 4180, character by character.
std::vector<std::vector<std::string>> read_csv(const std::string& text) {
  std::vector<std::vector<std::string>> rows(1, std::vector<std::string>(1));
  bool inside = false;
  for (std::size_t i = 0; i < text.size(); ++i) {
    const char c = text[i];
    std::string& cell = rows.back().back();
    if (inside && c == '"' && i + 1 < text.size() && text[i + 1] == '"') {
      cell += '"';
      ++i;
    } else if (c == '"') {
      inside = !inside;
    } else if (!inside && c == ',') {
      rows.back().emplace_back();
    } else if (!inside && c == '\r' && i + 1 < text.size() && text[i + 1] == '\n') {
      rows.emplace_back(1);
      ++i;
    } else {
      cell += c;
    }
  }
  if (rows.back().size() == 1 && rows.back()[0].empty()) rows.pop_back();
  return rows;
}

std::string cell(const std::vector<std::vector<std::string>>& rows, std::size_t row, const std::string& column) {
  const auto found = std::find(rows[0].begin(), rows[0].end(), column);
  if (found == rows[0].end()) FAIL("no column '" << column << "'");
  return rows.at(row).at(static_cast<std::size_t>(found - rows[0].begin()));
}

}  // namespace

TEST_CASE("report: CSV has one line a candidate with its scores and terms", "[report][unit]") {
  const auto rows = read_csv(report::shortlist_csv(test::plain_shortlist()));
  REQUIRE(rows.size() == 3);
  CHECK(cell(rows, 1, "rank") == "1");
  CHECK(cell(rows, 1, "candidate") == "834211");
  CHECK(cell(rows, 1, "marks") == "best; recommended");
  CHECK(cell(rows, 1, "response") == "ln(energy_kwh)");
  CHECK(cell(rows, 1, "n_terms") == "2");
  CHECK(cell(rows, 1, "cv_rmse") == "1234.5");
  CHECK(cell(rows, 2, "cv_rmse").empty());
  CHECK(cell(rows, 1, "checks_failed") == "equal-spread");
  CHECK(cell(rows, 1, "equation") == test::plain_shortlist().candidates[0].equation);
  CHECK(cell(rows, 1, "term of floor_area") == "ln(floor_area)");
  CHECK(cell(rows, 1, "term of fill, percent") == "√(101 − fill, percent)");
  CHECK(cell(rows, 2, "term of fill, percent").empty());
}

TEST_CASE("report: CSV ends with the front and the family of each line", "[report][unit]") {
  judge::Shortlist s = test::plain_shortlist();
  s.candidates[0].pareto = true;
  s.candidates[0].siblings = {"12", "7"};
  const auto rows = read_csv(report::shortlist_csv(s));
  CHECK(std::vector<std::string>(rows[0].end() - 3, rows[0].end()) ==
        std::vector<std::string>{"pareto", "n_siblings", "siblings"});
  CHECK(std::vector<std::string>(rows[1].end() - 3, rows[1].end()) == std::vector<std::string>{"yes", "2", "12; 7"});
  CHECK(std::vector<std::string>(rows[2].end() - 3, rows[2].end()) == std::vector<std::string>{"no", "0", ""});
}

TEST_CASE("report: CSV quotes what needs quoting and nothing else", "[report][unit]") {
  judge::Shortlist s = test::plain_shortlist();
  s.candidates.resize(1);
  s.candidates[0].equation = "y = \"a\", b\r\nand c";
  s.candidates[0].cautions = {"plain"};
  const std::string text = report::shortlist_csv(s);
  CHECK(text.find("\"y = \"\"a\"\", b\r\nand c\"") != std::string::npos);
  CHECK(text.find("\"plain\"") == std::string::npos);
  CHECK(text.ends_with("\r\n"));
  CHECK(cell(read_csv(text), 1, "equation") == s.candidates[0].equation);
}

TEST_CASE("report: CSV rows all have as many cells as the header", "[report][property]") {
  for (std::uint64_t seed = 0; seed < 300; ++seed) {
    INFO("seed " << seed);
    const judge::Shortlist s = test::made_shortlist(seed);
    const auto rows = read_csv(report::shortlist_csv(s));
    REQUIRE(rows.size() == s.candidates.size() + 1);
    for (const auto& row : rows) REQUIRE(row.size() == rows[0].size());
    for (std::size_t i = 0; i < s.candidates.size(); ++i)
      CHECK(cell(rows, i + 1, "equation") == s.candidates[i].equation);
  }
}

TEST_CASE("report: CSV of an empty shortlist is a header", "[report][unit]") {
  const auto rows = read_csv(report::shortlist_csv(judge::Shortlist{}));
  REQUIRE(rows.size() == 1);
  CHECK(rows[0][0] == "rank");
}

// Lines of the shortlist in a real search: families, the front, gates.
#include "support.hpp"

#include "pipeline/examine.hpp"
#include "pipeline/prepare.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <set>

namespace formsieve::test {

namespace {

using nlohmann::json;

const std::string kOpen = std::string(FORMSIEVE_SOURCE_DIR) + "/tests/reference/open";
const std::string kDemo = std::string(FORMSIEVE_SOURCE_DIR) + "/demo-data/coldstores.csv";

run::Plan small_demo() {
  run::Plan plan = plan_for(kDemo, "energy_kwh");
  plan.data.ignore = {"visit_day", "paint_batch", "volume_m3", "outdoor_c"};
  plan.search.pool = 200;
  return plan;
}

std::set<std::string> siblings_of(const json& line) {
  std::set<std::string> numbers;
  for (const auto& number : line.at("siblings")) numbers.insert(number.get<std::string>());
  return numbers;
}

bool fails(const json& candidate, const std::string& name) {
  for (const auto& check : candidate.at("checks"))
    if (check.at("check") == name) return !check.at("passes").get<bool>();
  return false;
}

/// Own-units predictions on the rows in use.
class Predictor {
 public:
  explicit Predictor(const run::Plan& plan) : prepared_(prepared(plan)), examiner_(prepared_) {}

  std::vector<double> of(const std::string& number) const {
    return examiner_.predictions(*search::choice_of(prepared_.space, search::BigCount(number)), 1);
  }

 private:
  static pipeline::Prepared prepared(const run::Plan& plan) {
    auto table = pipeline::load_table(plan);
    if (!table) FAIL(table.error().message);
    auto made = pipeline::prepare(*std::move(table), plan);
    if (!made) FAIL(made.error().message);
    return *std::move(made);
  }
  pipeline::Prepared prepared_;
  pipeline::Examiner examiner_;
};

double apart(const std::vector<double>& a, const std::vector<double>& b) {
  double sum = 0.0;
  for (std::size_t i = 0; i < a.size(); ++i) sum += (a[i] - b[i]) * (a[i] - b[i]);
  return std::sqrt(sum / static_cast<double>(a.size()));
}

}  // namespace

TEST_CASE("pipeline: every sibling predicts nearly as its line, and no two lines predict alike",
          "[pipeline][property]") {
  const TemporaryFolder folder;
  const run::Plan plan = small_demo();
  const json result = search_json(plan, folder);
  const json& lines = result.at("shortlist");
  REQUIRE(lines.size() >= 20);
  const Predictor predictor(plan);
  std::set<std::string> siblings;
  for (const auto& line : lines)
    for (const auto& number : siblings_of(line)) siblings.insert(number);
  CHECK_FALSE(siblings.empty());
  for (std::size_t i = 0; i < lines.size(); ++i) {
    const double limit = 0.05 * lines[i].at("cv").at("rmse").get<double>();
    const auto own = predictor.of(lines[i].at("candidate"));
    for (const auto& number : siblings_of(lines[i])) CHECK(apart(own, predictor.of(number)) < limit);
    for (std::size_t j = i + 1; j < lines.size(); ++j) {
      const std::string other = lines[j].at("candidate");
      if (siblings.count(other) == 0) CHECK(apart(own, predictor.of(other)) >= limit);
    }
  }
}

TEST_CASE("pipeline: families and single lines together are the ranking as it would be without families",
          "[pipeline][property]") {
  const TemporaryFolder folder;
  run::Plan plan = small_demo();
  const json with = search_json(plan, folder);
  plan.rank.families = false;
  plan.rank.shortlist = 200;
  const json without = search_json(plan, folder);
  CHECK(without.at("space").at("family_rule").get<std::string>().find("rank.families = false") != std::string::npos);
  std::map<std::string, std::size_t> rank;
  for (const auto& line : without.at("shortlist")) {
    rank[line.at("candidate")] = line.at("rank");
    CHECK(line.at("siblings").empty());
  }
  std::set<std::size_t> covered;
  for (const auto& line : with.at("shortlist")) {
    CHECK(rank.at(line.at("candidate")) == line.at("rank").get<std::size_t>());
    covered.insert(line.at("rank").get<std::size_t>());
    for (const auto& number : siblings_of(line)) {
      CHECK(rank.at(number) > line.at("rank").get<std::size_t>());
      covered.insert(rank.at(number));
    }
  }
  const std::size_t last = with.at("shortlist")[24].at("rank");  // named lines may follow
  for (std::size_t r = 1; r < last; ++r) CHECK(covered.count(r) == 1);
}

TEST_CASE("pipeline: lines on the front are those that no other line beats", "[pipeline][property]") {
  const TemporaryFolder folder;
  const json result = search_json(small_demo(), folder);
  const json& lines = result.at("shortlist");
  const auto failing = [](const json& line) {
    int count = 0;
    for (const auto& check : line.at("checks")) count += check.at("passes").get<bool>() ? 0 : 1;
    return count;
  };
  std::size_t on_front = 0;
  for (const auto& line : lines) {
    bool beaten = false;
    for (const auto& other : lines) {
      const double mine = line.at("cv").at("rmse"), theirs = other.at("cv").at("rmse");
      const auto a = line.at("terms").size(), b = other.at("terms").size();
      const int f = failing(line), g = failing(other);
      beaten = beaten || (theirs <= mine && b <= a && g <= f && (theirs < mine || b < a || g < f));
    }
    CHECK(line.at("pareto").get<bool>() == !beaten);
    on_front += beaten ? 0 : 1;
  }
  CHECK(on_front > 0);
}

TEST_CASE("pipeline: gates list the first by rank that pass, and say how many did not", "[pipeline][property]") {
  const TemporaryFolder folder;
  run::Plan plan = plan_for(kOpen + "/trees.csv", "volume");
  plan.rank.families = false;
  plan.rank.shortlist = 2000;
  const json all = search_json(plan, folder);
  std::vector<std::string> passing;
  for (const auto& line : all.at("shortlist"))
    if (!fails(line, "straightness")) passing.push_back(line.at("candidate"));
  REQUIRE(passing.size() > 6);
  REQUIRE(passing.size() < all.at("shortlist").size());

  plan.rank.require = {"straightness"};
  const json gated = search_json(plan, folder);
  std::vector<std::string> listed;
  for (const auto& line : gated.at("shortlist")) listed.push_back(line.at("candidate"));
  CHECK(listed == passing);
  CHECK(gated.at("space").at("set_aside_require") == all.at("shortlist").size() - passing.size());
  CHECK(gated.at("remarks").dump().find("the pool was used up before the list was full") != std::string::npos);

  plan.rank.shortlist = 5;
  const json few = search_json(plan, folder);
  for (std::size_t i = 0; i < 5; ++i) CHECK(few.at("shortlist")[i].at("candidate") == passing[i]);
  CHECK(few.at("space").at("set_aside_require").get<std::size_t>() <= all.at("shortlist").size() - passing.size());
  for (const auto& line : few.at("shortlist")) CHECK_FALSE(fails(line, "straightness"));
  CHECK(few.at("shortlist")[0].at("marks").dump().find("best") != std::string::npos);
}

TEST_CASE("pipeline: a gate that nothing passes leaves an empty shortlist that says so", "[pipeline][unit]") {
  const TemporaryFolder folder;
  std::string text = "y,x\n";  // a row far away from all others, which every candidate with x rests on
  for (int i = 0; i < 30; ++i) text += std::to_string(5 + (i * 7) % 11) + "," + std::to_string(1 + i % 3) + "\n";
  text += "900,400\n";
  run::Plan plan = plan_for(folder.write("far.csv", text), "y");
  plan.forms.response = std::vector<run::FormEntry>{form_entry("identity")};
  plan.forms.always = {"x"};
  plan.forms.of["x"] = {form_entry("identity")};
  plan.rank.require = {"no-single-row"};
  const json result = search_json(plan, folder);
  CHECK(result.at("shortlist").empty());
  CHECK(result.at("space").at("set_aside_require") == 1);
  CHECK(result.at("remarks").dump().find("No candidate passes the required checks") != std::string::npos);
}

TEST_CASE("pipeline: lines, families and gates are the same bytes for 1, 2 and 4 threads",
          "[pipeline][property][parallel]") {
  run::Plan plan = small_demo();
  plan.rank.require = {"equal-spread"};
  std::vector<std::string> texts;
  for (const unsigned threads : {1U, 2U, 4U}) {
    const TemporaryFolder folder;
    (void)search_json(plan, folder, threads);
    texts.push_back(read_text(folder.file("out.run") + "/shortlist.json"));
  }
  CHECK(texts[1] == texts[0]);
  CHECK(texts[2] == texts[0]);
}

}  // namespace formsieve::test

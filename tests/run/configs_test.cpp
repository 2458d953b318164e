// The commented example plans: all can be read, and name only columns that the demo's table has and forms that exist.
#include <formsieve/forms.hpp>
#include <formsieve/run.hpp>

#include "run/plan_forms.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <filesystem>
#include <fstream>
#include <sstream>
#include <string>
#include <vector>

using namespace formsieve;
namespace fs = std::filesystem;

namespace {

std::vector<std::string> header_of(const fs::path& table) {
  std::ifstream in(table);
  std::string line, name;
  std::getline(in, line);
  if (!line.empty() && line.back() == '\r') line.pop_back();
  std::istringstream cells(line);
  std::vector<std::string> names;
  while (std::getline(cells, name, ',')) names.push_back(name);
  return names;
}

std::vector<std::string> columns_named(const run::Plan& plan) {
  std::vector<std::string> names = plan.data.ignore;
  names.push_back(plan.data.response);
  for (const auto* role : {&plan.data.weight, &plan.data.group, &plan.data.order, &plan.data.fold})
    if (*role) names.push_back(**role);
  for (const auto& [column, bounds] : plan.data.bounds) names.push_back(column);
  for (const auto& [column, direction] : plan.forms.direction) names.push_back(column);
  for (const auto& [column, menu] : plan.forms.of) names.push_back(column);
  names.insert(names.end(), plan.forms.always.begin(), plan.forms.always.end());
  return names;
}

void check_forms(const std::vector<run::FormEntry>& menu) {
  for (const run::FormEntry& entry : menu) {
    INFO(entry.where);
    CHECK(forms::kind_from_name(entry.form));
  }
}

}  // namespace

TEST_CASE("run: example plans can be read and fit the table of the demo", "[run][golden]") {
  std::size_t n_plans = 0;
  for (const auto& file : fs::directory_iterator(FORMSIEVE_SOURCE_DIR "/configs")) {
    if (file.path().extension() != ".toml") continue;
    ++n_plans;
    INFO(file.path().filename().string());
    const auto plan = run::read_plan(file.path().string());
    if (!plan.ok()) FAIL(plan.error().where << ": " << plan.error().message);
    const auto columns = header_of(file.path().parent_path() / plan->data.file);
    REQUIRE_FALSE(columns.empty());
    for (const std::string& name : columns_named(*plan)) {
      INFO(name);
      CHECK(std::find(columns.begin(), columns.end(), name) != columns.end());
    }
    if (plan->forms.response) check_forms(*plan->forms.response);
    if (plan->forms.default_menu) check_forms(*plan->forms.default_menu);
    for (const auto& [column, menu] : plan->forms.of) check_forms(menu);
  }
  CHECK(n_plans >= 4);
}

TEST_CASE("run: plan's own form names are those of the forms room", "[run][unit]") {
  CHECK(forms::kind_name(forms::Kind::spline) == run::kSplineForm);
  CHECK(forms::kind_name(forms::Kind::fractional_polynomial) == run::kFractionalPolynomialForm);
}

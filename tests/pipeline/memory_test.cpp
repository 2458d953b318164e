// What a search will need of memory, and the refusal of one that would not fit.
#include "base/memory.hpp"
#include "design/own_units.hpp"
#include "pipeline/memory.hpp"
#include "support.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <filesystem>

using namespace formsieve;

namespace {

/// A search over the demo table's rows with as many folds and repeats as asked for.
run::Plan demo_plan(std::size_t folds, std::size_t repeats) {
  run::Plan plan = test::plan_for(std::string(FORMSIEVE_SOURCE_DIR) + "/demo-data/coldstores.csv", "energy_kwh");
  plan.search.folds = folds;
  plan.search.repeats = repeats;
  return plan;
}

pipeline::Prepared prepared_for(const run::Plan& plan) {
  auto table = pipeline::load_table(plan);
  REQUIRE(table);
  auto prepared = pipeline::prepare(std::move(*table), plan);
  REQUIRE(prepared);
  return std::move(*prepared);
}

bool fits(const run::Plan& plan, std::uint64_t available) {
  return pipeline::check_memory(prepared_for(plan), plan, 1, available).ok();
}

std::uint64_t peak(const run::Plan& plan) {
  return static_cast<std::uint64_t>(std::ceil(pipeline::memory_need(prepared_for(plan), plan, 1).peak()));
}

}  // namespace

TEST_CASE("pipeline: the memory of the Gram matrices is what they take", "[pipeline][unit]") {
  const run::Plan plan = demo_plan(5, 3);
  const pipeline::Prepared prepared = prepared_for(plan);
  auto grams = design::build_grams(prepared.data, prepared.folds, 1);
  REQUIRE(grams);
  std::vector<design::Pilot> pilots;
  const std::vector<double> ones(prepared.data.n_rows, 1.0);
  for (std::size_t r = 0; r < prepared.data.response_forms.size(); ++r)
    if (prepared.data.response_forms[r].kind != forms::Kind::identity)
      pilots.push_back({r, {ones, ones, ones}, {ones, ones, ones}});
  REQUIRE_FALSE(pilots.empty());
  const auto own = design::build_own_units_grams(prepared.data, prepared.folds, pilots, 1);
  REQUIRE(own);
  std::size_t numbers = grams->all.size();
  for (const auto* matrices : {&grams->training, &grams->validation})
    for (const auto& matrix : *matrices) numbers += matrix.size();
  for (const auto& one : *own)
    for (const auto& matrix : one.validation) numbers += matrix.size();
  CHECK(pipeline::memory_need(prepared, plan, 1).grams == static_cast<double>(numbers * sizeof(double)));
}

TEST_CASE("pipeline: a search is refused exactly when it needs more memory than is free", "[pipeline][unit]") {
  const run::Plan plan = demo_plan(10, 1);
  CHECK(fits(plan, peak(plan)));
  CHECK_FALSE(fits(plan, peak(plan) - 1));
  CHECK(pipeline::check_memory(prepared_for(plan), plan, 1, std::nullopt).ok());
}

TEST_CASE("pipeline: the refusal names the largest number of repeats that fits", "[pipeline][unit]") {
  const std::uint64_t available = peak(demo_plan(10, 7));
  const run::Plan plan = demo_plan(10, 20);
  const Status status = pipeline::check_memory(prepared_for(plan), plan, 1, available);
  REQUIRE_FALSE(status);
  CHECK(status.error().kind == ErrorKind::plan);
  CHECK_THAT(status.error().hint, Catch::StartsWith("search.repeats = 7 fits"));
  CHECK_THAT(status.error().message, Catch::Contains("of memory") && Catch::Contains("200 folds"));
}

TEST_CASE("pipeline: the refusal names the largest number of folds that fits", "[pipeline][unit]") {
  const std::uint64_t available = peak(demo_plan(6, 1));
  const run::Plan once = demo_plan(30, 1);
  const Status status = pipeline::check_memory(prepared_for(once), once, 1, available);
  REQUIRE_FALSE(status);
  CHECK_THAT(status.error().hint, Catch::StartsWith("search.folds = 6 fits"));
  const run::Plan often = demo_plan(30, 4);
  const Status often_status = pipeline::check_memory(prepared_for(often), often, 1, available);
  REQUIRE_FALSE(often_status);
  CHECK_THAT(often_status.error().hint, Catch::StartsWith("search.folds = 6 with search.repeats = 1 fits"));
}

TEST_CASE("pipeline: where no number of folds fits the refusal asks for fewer columns", "[pipeline][unit]") {
  run::Plan plan = demo_plan(10, 1);
  plan.search.pool = 1;
  const Status status = pipeline::check_memory(prepared_for(plan), plan, 1, peak(plan) / 4);
  REQUIRE_FALSE(status);
  CHECK_THAT(status.error().hint, Catch::StartsWith("forms that make at most "));
}

TEST_CASE("base: free memory is the least of what machine and control groups leave", "[base][unit]") {
  const test::TemporaryFolder folder;
  const std::string root = folder.file("");
  CHECK_FALSE(base::available_memory(folder.file("nowhere")).has_value());
  std::filesystem::create_directories(root + "/proc");
  std::filesystem::create_directories(root + "/sys/fs/cgroup/memory");
  folder.write("proc/meminfo", "MemTotal:  9000 kB\nMemFree: 10 kB\nMemAvailable:    5000 kB\nBuffers: 1 kB\n");
  CHECK(base::available_memory(root) == 5000u * 1024u);
  folder.write("sys/fs/cgroup/memory.max", "max\n");
  folder.write("sys/fs/cgroup/memory.current", "1000000\n");
  CHECK(base::available_memory(root) == 5000u * 1024u);
  folder.write("sys/fs/cgroup/memory.max", "3000000\n");
  CHECK(base::available_memory(root) == 2000000u);
  folder.write("sys/fs/cgroup/memory.stat", "anon 1\ninactive_file 400000\nactive_file 7\n");
  CHECK(base::available_memory(root) == 2400000u);
  folder.write("sys/fs/cgroup/memory/memory.limit_in_bytes", "900000\n");
  folder.write("sys/fs/cgroup/memory/memory.usage_in_bytes", "1000000\n");
  CHECK(base::available_memory(root) == 0u);
}

TEST_CASE("base: free memory of this machine is known", "[base][unit]") {
  REQUIRE(base::available_memory().has_value());
  CHECK(*base::available_memory() > 1000000u);
}

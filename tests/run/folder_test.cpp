#include "run/folder.hpp"

#include "run/file_io.hpp"

#include <catch2/catch.hpp>

#include <unistd.h>

#include <array>
#include <filesystem>
#include <fstream>
#include <string>
#include <vector>

using namespace formsieve;
using run::RunFolder;
namespace fs = std::filesystem;

namespace {

/// A folder of its own for one test, gone afterwards.
class Scratch {
 public:
  Scratch() {
    std::string name = (fs::temp_directory_path() / "formsieve-run-test-XXXXXX").string();
    REQUIRE(::mkdtemp(name.data()) != nullptr);
    root_ = name;
  }
  ~Scratch() {
    std::error_code ignored;
    fs::permissions(root_, fs::perms::owner_all, ignored);
    fs::remove_all(root_, ignored);
  }
  Scratch(const Scratch&) = delete;
  Scratch& operator=(const Scratch&) = delete;
  std::string path(const std::string& name) const { return (root_ / name).string(); }

 private:
  fs::path root_;
};

void put(const std::string& path, const std::string& text) { std::ofstream(path, std::ios::binary) << text; }

std::string resolved_plan() {
  run::Plan plan;
  plan.data.file = std::string("a.csv");
  plan.data.response = std::string("y");
  return run::write_plan(plan);
}

/// A run folder as a search leaves it.
std::string finished_run(const Scratch& scratch) {
  const auto folder = RunFolder::create(scratch.path("a.run"), false);
  REQUIRE(folder.ok());
  REQUIRE(folder->write(run::kPlanFile, resolved_plan()).ok());
  REQUIRE(folder->write(run::kShortlistJsonFile, "{}").ok());
  REQUIRE(folder->write(run::kLogFile, "done\n").ok());
  fs::create_directory(folder->file(run::kStateFolder));
  put(folder->file("state/checkpoint"), "x");
  return folder->path();
}

}  // namespace

TEST_CASE("run: folder is made with its parents and reads back what was written", "[run][unit]") {
  const Scratch scratch;
  const auto folder = RunFolder::create(scratch.path("deep/er/a.run"), false);
  REQUIRE(folder.ok());
  CHECK(fs::is_empty(folder->path()));  // the writability check leaves nothing
  const std::string text = std::string("line\r\n\0binary", 13);
  REQUIRE(folder->write("survey.json", text).ok());
  CHECK(*folder->read("survey.json") == text);
  REQUIRE(folder->write("survey.json", "shorter").ok());
  CHECK(*folder->read("survey.json") == "shorter");
  CHECK(std::distance(fs::directory_iterator(folder->path()), {}) == 1);  // no half-written file beside it
  CHECK(RunFolder::open(folder->path()).ok());
}

TEST_CASE("run: folder of an earlier run is refused unless replaced", "[run][unit]") {
  const Scratch scratch;
  const std::string path = finished_run(scratch);
  const auto again = RunFolder::create(path, false);
  REQUIRE_FALSE(again.ok());
  CHECK(again.error().kind == ErrorKind::usage);
  CHECK_THAT(again.error().hint, Catch::Contains("--replace"));
  CHECK_FALSE(RunFolder::check(path, false).ok());
  CHECK(RunFolder::check(path, true).ok());
  CHECK(fs::exists(path + "/shortlist.json"));

  put(path + "/notes.txt", "mine");
  REQUIRE(RunFolder::create(path, true).ok());
  CHECK_FALSE(fs::exists(path + "/shortlist.json"));
  CHECK_FALSE(fs::exists(path + "/plan.toml"));
  CHECK_FALSE(fs::exists(path + "/log.txt"));
  CHECK_FALSE(fs::exists(path + "/state"));
  CHECK(*run::read_file(path + "/notes.txt") == "mine");  // what no run wrote stays
}

TEST_CASE("run: folder that holds no run is never touched, replace or not", "[run][unit]") {
  const Scratch scratch;
  const std::string path = scratch.path("photos");
  fs::create_directory(path);
  put(path + "/holiday.jpg", "x");
  for (const bool replace : {false, true}) {
    const auto folder = RunFolder::create(path, replace);
    REQUIRE_FALSE(folder.ok());
    CHECK(folder.error().kind == ErrorKind::usage);
    CHECK_THAT(folder.error().hint, Catch::Contains("--out"));
    CHECK_FALSE(RunFolder::check(path, replace).ok());
    CHECK(*run::read_file(path + "/holiday.jpg") == "x");
  }
  CHECK(RunFolder::open(path).error().kind == ErrorKind::io);
}

TEST_CASE("run: folder with a plan that a person keeps is never replaced", "[run][unit]") {
  const Scratch scratch;
  const std::string path = scratch.path("project");
  fs::create_directory(path);
  put(path + "/plan.toml", "# my own plan\n[data]\n");
  CHECK_FALSE(RunFolder::create(path, true).ok());
  put(path + "/log.txt", "something");
  CHECK_FALSE(RunFolder::create(path, true).ok());
  CHECK(*run::read_file(path + "/plan.toml") == "# my own plan\n[data]\n");
}

TEST_CASE("run: folder replaced removes a linked state folder, not what it points to", "[run][unit]") {
  const Scratch scratch;
  const std::string path = finished_run(scratch);
  fs::remove_all(path + "/state");
  fs::create_directory(scratch.path("elsewhere"));
  put(scratch.path("elsewhere/keep"), "x");
  fs::create_directory_symlink(scratch.path("elsewhere"), path + "/state");
  REQUIRE(RunFolder::create(path, true).ok());
  CHECK_FALSE(fs::exists(fs::symlink_status(path + "/state")));
  CHECK(fs::exists(scratch.path("elsewhere/keep")));
}

TEST_CASE("run: folder that is empty is taken as it is", "[run][unit]") {
  const Scratch scratch;
  fs::create_directory(scratch.path("empty"));
  CHECK(RunFolder::check(scratch.path("empty"), false).ok());
  CHECK(RunFolder::create(scratch.path("empty"), false).ok());
  CHECK(RunFolder::check(scratch.path("new"), false).ok());
  CHECK_FALSE(fs::exists(scratch.path("new")));
}

TEST_CASE("run: folder that cannot be is refused with what to do", "[run][unit]") {
  const Scratch scratch;
  put(scratch.path("file"), "x");
  for (const auto& path : {scratch.path("file"), scratch.path("file/below"), std::string(),
                           std::string("/proc/formsieve.run"), scratch.path(std::string(300, 'n'))}) {
    INFO(path);
    const auto folder = RunFolder::create(path, true);
    REQUIRE_FALSE(folder.ok());
    CHECK_FALSE(folder.error().message.empty());
    CHECK_THAT(folder.error().hint, Catch::Contains("--out"));
  }
  CHECK(RunFolder::open(scratch.path("nothing")).error().kind == ErrorKind::io);
  CHECK(RunFolder::open(scratch.path("file")).error().kind == ErrorKind::io);
}

TEST_CASE("run: folder that cannot be written is refused before the work", "[run][unit]") {
  if (::geteuid() == 0) return;  // nothing is forbidden to root
  const Scratch scratch;
  fs::create_directory(scratch.path("locked"));
  fs::permissions(scratch.path("locked"), fs::perms::owner_read | fs::perms::owner_exec);
  const auto folder = RunFolder::create(scratch.path("locked"), false);
  REQUIRE_FALSE(folder.ok());
  CHECK(folder.error().kind == ErrorKind::io);
}

TEST_CASE("run: file keeps its old text when it cannot be replaced", "[run][unit]") {
  const Scratch scratch;
  put(scratch.path("a.json"), "old");
  fs::create_directory(scratch.path("a.json.part"));  // the file beside it cannot be opened
  const auto status = run::write_file(scratch.path("a.json"), "new");
  REQUIRE_FALSE(status.ok());
  CHECK(status.error().kind == ErrorKind::io);
  CHECK(status.error().where == scratch.path("a.json"));
  CHECK(*run::read_file(scratch.path("a.json")) == "old");
}

TEST_CASE("run: file on a full disk is an error that says so", "[run][unit]") {
  // /dev/full fails every write with "no space left"; the folder of the file beside it is not writable there, so the
  // check goes through a link whose target is the device.
  if (!fs::exists("/dev/full")) return;
  const Scratch scratch;
  fs::create_symlink("/dev/full", scratch.path("a.json.part"));
  const auto status = run::write_file(scratch.path("a.json"), "new");
  REQUIRE_FALSE(status.ok());
  CHECK_THAT(status.error().message, Catch::Contains("space"));
  CHECK_THAT(status.error().hint, Catch::Contains("space on the disk"));
  CHECK_FALSE(fs::exists(scratch.path("a.json")));
}

TEST_CASE("run: default folder is named after the plan, else the table", "[run][unit]") {
  run::Plan plan;
  plan.data.file = "tables/cold.stores.csv";
  CHECK(run::default_folder(plan) == "cold.stores.run");
  plan.path = "plans/wide.toml";
  CHECK(run::default_folder(plan) == "wide.run");
}

TEST_CASE("run: folds table has a line a row and a column a repeat", "[run][unit]") {
  const std::vector<std::size_t> lines{2, 3, 7};
  const std::vector<std::uint32_t> first{0, 1, 0}, second{1, 0, 9};
  const std::vector<std::span<const std::uint32_t>> folds{first, second};
  CHECK(run::folds_csv(lines, folds) == "line,fold_1,fold_2\r\n2,1,2\r\n3,2,1\r\n7,1,10\r\n");
}

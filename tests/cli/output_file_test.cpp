#include "output_file.hpp"

#include <catch2/catch.hpp>

#include <filesystem>
#include <fstream>
#include <sstream>

#include <unistd.h>

using namespace formsieve;
using namespace formsieve::cli;
namespace fs = std::filesystem;

namespace {

class Folder {
 public:
  Folder() : path_(fs::temp_directory_path() / ("formsieve-output-" + std::to_string(getpid()))) {
    fs::create_directories(path_);
  }
  ~Folder() { fs::remove_all(path_); }
  std::string file(const std::string& name) const { return (path_ / name).string(); }
  std::size_t n_entries() const {
    return static_cast<std::size_t>(std::distance(fs::directory_iterator(path_), fs::directory_iterator()));
  }

 private:
  fs::path path_;
};

std::string content(const std::string& path) {
  std::ostringstream text;
  text << std::ifstream(path).rdbuf();
  return text.str();
}

}  // namespace

TEST_CASE("cli: an output file appears only when it is complete", "[cli][unit]") {
  const Folder folder;
  {
    Result<OutputFile> file = OutputFile::open(folder.file("plan.toml"), false);
    REQUIRE(file.ok());
    CHECK_FALSE(fs::exists(folder.file("plan.toml")));
    REQUIRE(file->finish("a = 1\n").ok());
  }
  CHECK(content(folder.file("plan.toml")) == "a = 1\n");
  CHECK(folder.n_entries() == 1);
}

TEST_CASE("cli: an unfinished output file leaves nothing behind", "[cli][unit]") {
  const Folder folder;
  { REQUIRE(OutputFile::open(folder.file("plan.toml"), false).ok()); }
  CHECK(folder.n_entries() == 0);
}

TEST_CASE("cli: an existing file is kept unless it may be replaced", "[cli][unit]") {
  const Folder folder;
  std::ofstream(folder.file("plan.toml")) << "mine";
  const Result<OutputFile> refused = OutputFile::open(folder.file("plan.toml"), false);
  REQUIRE_FALSE(refused.ok());
  CHECK(refused.error().kind == ErrorKind::usage);
  CHECK(content(folder.file("plan.toml")) == "mine");
  Result<OutputFile> file = OutputFile::open(folder.file("plan.toml"), true);
  REQUIRE(file.ok());
  REQUIRE(file->finish("new").ok());
  CHECK(content(folder.file("plan.toml")) == "new");
}

TEST_CASE("cli: a file in no folder, or a folder itself, cannot be written", "[cli][unit]") {
  const Folder folder;
  for (const std::string& path : {folder.file("none/plan.toml"), folder.file("")}) {
    const Result<OutputFile> file = OutputFile::open(path, true);
    REQUIRE_FALSE(file.ok());
    CHECK(file.error().kind == ErrorKind::io);
    CHECK(file.error().where == path);
  }
}

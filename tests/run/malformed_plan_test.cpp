// Every file in malformed/ is a plan with one thing wrong. Its first lines say where the message must point, what it
// must say and what its hint must contain.
#include <formsieve/run.hpp>

#include <catch2/catch.hpp>

#include <filesystem>
#include <fstream>
#include <sstream>
#include <string>
#include <vector>

using namespace formsieve;

namespace {

std::string text_of(const std::filesystem::path& path) {
  std::ifstream in(path, std::ios::binary);
  std::ostringstream out;
  out << in.rdbuf();
  return out.str();
}

std::string after(const std::string& text, const std::string& prefix) {
  const std::size_t begin = text.find(prefix);
  if (begin == std::string::npos) return {};
  const std::size_t from = begin + prefix.size();
  return text.substr(from, text.find('\n', from) - from);
}

std::vector<std::filesystem::path> malformed_plans() {
  std::vector<std::filesystem::path> files;
  for (const auto& entry : std::filesystem::directory_iterator(FORMSIEVE_SOURCE_DIR "/tests/run/malformed"))
    if (entry.path().extension() == ".toml") files.push_back(entry.path());
  return files;
}

}  // namespace

TEST_CASE("run: plan names place, key and remedy when something is wrong", "[run][unit]") {
  const auto files = malformed_plans();
  REQUIRE(files.size() >= 30);
  for (const auto& file : files) {
    const std::string text = text_of(file);
    INFO(file.filename().string());
    const std::string at = after(text, "# at: "), says = after(text, "# says: "), hint = after(text, "# hint: ");
    REQUIRE_FALSE(at.empty());
    REQUIRE_FALSE(says.empty());
    REQUIRE_FALSE(hint.empty());
    const auto plan = run::parse_plan(text, "plan.toml");
    CHECK_FALSE(plan.ok());
    if (plan.ok()) continue;
    CHECK(plan.error().kind == ErrorKind::plan);
    CHECK(plan.error().where == "plan.toml:" + at);
    CHECK_THAT(plan.error().message, Catch::Contains(says));
    CHECK_THAT(plan.error().hint, Catch::Contains(hint));
  }
}

TEST_CASE("run: plan is refused in words when the file is not text", "[run][unit]") {
  const std::string utf16{"\xff\xfe[\0d\0a\0t\0a\0]\0", 14};
  for (const std::string& bytes :
       {utf16, std::string("\0\0\0\0", 4), std::string("PK\x03\x04"), std::string("\x80"), std::string(100'000, '['),
        std::string(100'000, '{'), "a = " + std::string(9999, '[')}) {
    const auto plan = run::parse_plan(bytes, "plan.toml");
    REQUIRE_FALSE(plan.ok());
    CHECK(plan.error().kind == ErrorKind::plan);
    CHECK_FALSE(plan.error().message.empty());
    CHECK_FALSE(plan.error().hint.empty());
  }
}

TEST_CASE("run: plan never crashes when bytes of a good plan are changed", "[run][property]") {
  const std::string good = text_of(FORMSIEVE_SOURCE_DIR "/tests/run/full-plan.toml");
  REQUIRE(run::parse_plan(good, "plan.toml").ok());
  std::uint64_t state = 20261201;
  const auto next = [&] { return (state = state * 6364136223846793005u + 1442695040888963407u) >> 33; };
  std::size_t refused = 0;
  for (int round = 0; round < 3000; ++round) {
    std::string bytes = good;
    for (std::uint64_t k = 0; k <= next() % 3; ++k) {
      const std::size_t at = next() % bytes.size();
      switch (next() % 3) {
        case 0:
          bytes[at] = static_cast<char>(next());
          break;
        case 1:
          bytes.erase(at, next() % 20 + 1);
          break;
        default:
          bytes.insert(at, 1, "[]{}\"=,.#\n\\-0"[next() % 13]);
      }
      if (bytes.empty()) bytes.push_back('x');
    }
    const auto plan = run::parse_plan(bytes, "plan.toml");
    if (plan.ok()) continue;
    ++refused;
    CHECK(plan.error().kind == ErrorKind::plan);
    CHECK(plan.error().where.starts_with("plan.toml:"));
  }
  CHECK(refused > 1000);
}

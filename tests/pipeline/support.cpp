#include "support.hpp"

#include <catch2/catch.hpp>

#include <unistd.h>

#include <atomic>
#include <fstream>
#include <sstream>

namespace formsieve::test {

TemporaryFolder::TemporaryFolder() {
  static std::atomic<int> next{0};
  path_ = std::filesystem::temp_directory_path() /
          ("formsieve-test-" + std::to_string(getpid()) + "-" + std::to_string(next++));
  std::filesystem::create_directories(path_);
}

TemporaryFolder::~TemporaryFolder() {
  std::error_code ignored;
  std::filesystem::remove_all(path_, ignored);
}

std::string TemporaryFolder::write(const std::string& name, const std::string& text) const {
  std::ofstream(file(name), std::ios::binary) << text;
  return file(name);
}

std::string read_text(const std::string& path) {
  std::ifstream file(path, std::ios::binary);
  std::ostringstream text;
  text << file.rdbuf();
  return text.str();
}

run::Plan plan_for(const std::string& file, const std::string& response) {
  run::Plan plan;
  plan.data.file = file;
  plan.data.response = response;
  return plan;
}

nlohmann::json search_json(const run::Plan& plan, const TemporaryFolder& folder, unsigned threads) {
  pipeline::SearchOptions options;
  options.out = folder.file("out.run");
  options.replace = true;
  options.threads = threads;
  const auto outcome = pipeline::search(plan, options);
  if (!outcome) FAIL(outcome.error().message << " | " << outcome.error().where << " | " << outcome.error().hint);
  return nlohmann::json::parse(read_text(folder.file("out.run") + "/shortlist.json"));
}

run::FormEntry form_entry(const std::string& form, std::vector<double> parameters) {
  run::FormEntry entry;
  entry.form = form;
  entry.parameters = std::move(parameters);
  return entry;
}

}  // namespace formsieve::test

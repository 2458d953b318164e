// Shared by the pipeline tests: temporary folders, small tables, one search and its shortlist.json as read back.
#pragma once

#include <formsieve/pipeline.hpp>

#include <nlohmann/json.hpp>

#include <filesystem>
#include <string>
#include <vector>

namespace formsieve::test {

/// A folder that is removed with the object.
class TemporaryFolder {
 public:
  TemporaryFolder();
  ~TemporaryFolder();
  TemporaryFolder(const TemporaryFolder&) = delete;
  TemporaryFolder& operator=(const TemporaryFolder&) = delete;

  std::string file(const std::string& name) const { return (path_ / name).string(); }
  std::string write(const std::string& name, const std::string& text) const;

 private:
  std::filesystem::path path_;
};

std::string read_text(const std::string& path);

/// A plan for a table, everything else as by default.
run::Plan plan_for(const std::string& file, const std::string& response);

/// Runs the search into a fresh folder and returns shortlist.json; fails the test when the search fails.
nlohmann::json search_json(const run::Plan& plan, const TemporaryFolder& folder, unsigned threads = 0);

/// One form as a plan entry.
run::FormEntry form_entry(const std::string& form, std::vector<double> parameters = {});

}  // namespace formsieve::test

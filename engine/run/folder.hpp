// The run folder: everything one search leaves behind. Created once, never overwritten unasked, its files replaced
// whole.
#pragma once

#include <formsieve/base.hpp>
#include <formsieve/run.hpp>

#include <cstddef>
#include <cstdint>
#include <span>
#include <string>
#include <string_view>
#include <vector>

namespace formsieve::run {

// Names in a run folder (design.md, "What a run folder holds").
inline constexpr std::string_view kPlanFile = "plan.toml";
inline constexpr std::string_view kSurveyFile = "survey.json";
inline constexpr std::string_view kShortlistJsonFile = "shortlist.json";
inline constexpr std::string_view kShortlistCsvFile = "shortlist.csv";
inline constexpr std::string_view kModelsFile = "models.json";
inline constexpr std::string_view kShortlistWorkbookFile = "shortlist.xlsx";
inline constexpr std::string_view kPageFile = "report.html";
inline constexpr std::string_view kLogFile = "log.txt";
inline constexpr std::string_view kFoldsFile = "folds.csv";
inline constexpr std::string_view kStateFolder = "state";

/// First line of every plan that write_plan wrote: tells a run's plan from one that a person keeps.
inline constexpr std::string_view kResolvedPlanHeader = "# The plan of a formsieve run, every setting written out.";

class RunFolder {
 public:
  /// What `create` would refuse about an existing place, without touching anything: asked before the table is read.
  static Status check(const std::string& path, bool replace);

  /// Makes the folder (and its parents) ready for a run and makes sure that files can be written there. An empty folder
  /// is taken as it is. A folder that holds a run is refused unless `replace`; then that run's files are removed, and
  /// nothing else. A folder that holds other things and no run is refused always. Errors: usage (it exists), io.
  static Result<RunFolder> create(const std::string& path, bool replace);

  /// An existing run folder, for reading. Errors (kind io): missing, not a folder, holds no run.
  static Result<RunFolder> open(const std::string& path);

  const std::string& path() const noexcept { return path_; }
  std::string file(std::string_view name) const;  ///< path of one of its files

  /// Replaces one of its files in one step (write_file).
  Status write(std::string_view name, std::string_view text) const;
  Result<std::string> read(std::string_view name) const;

 private:
  explicit RunFolder(std::string path) : path_(std::move(path)) {}
  std::string path_;
};

/// Where a search without --out puts its folder: the plan's name, else the table's, without extension and with ".run",
/// in the working folder.
std::string default_folder(const Plan& plan);

/// folds.csv: the line of the data file of each row in use, and its fold (from 1) in each repeat.
/// `line_of_row` [n]; `fold_of` [repeats][n], folds counted from 0. Cost O(n·repeats).
std::string folds_csv(std::span<const std::size_t> line_of_row,
                      std::span<const std::span<const std::uint32_t>> fold_of);

}  // namespace formsieve::run

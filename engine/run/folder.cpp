#include "run/folder.hpp"

#include "run/file_io.hpp"

#include <algorithm>
#include <array>
#include <filesystem>
#include <system_error>
#include <utility>

namespace formsieve::run {

namespace fs = std::filesystem;

namespace {

// What a run leaves beside its plan. A plan alone is no run: a person may keep one anywhere.
constexpr std::array kRunFiles{
    kLogFile, kSurveyFile, kFoldsFile, kShortlistJsonFile, kShortlistCsvFile, kModelsFile, kShortlistWorkbookFile,
    kPageFile};

Error folder_error(const std::string& what, const std::string& path, const std::error_code& code) {
  return {ErrorKind::io, what + ": " + code.message(), path, "choose another place with --out FOLDER"};
}

bool present(const fs::path& path) {
  std::error_code ignored;
  return fs::exists(fs::symlink_status(path, ignored));
}

bool holds_run_files(const fs::path& folder) {
  return std::any_of(kRunFiles.begin(), kRunFiles.end(), [&](auto name) { return present(folder / name); });
}

/// True when there is a plan that no run wrote.
bool holds_own_plan(const fs::path& folder) {
  if (!present(folder / kPlanFile)) return false;
  const auto text = read_file((folder / kPlanFile).string());
  return !text || !text->starts_with(kResolvedPlanHeader);
}

Status may_replace(const fs::path& folder, bool replace) {
  const std::string path = folder.string();
  if (!holds_run_files(folder) || holds_own_plan(folder))
    return Error{ErrorKind::usage, "the folder '" + path + "' holds files that are not a run's", path,
                 "choose another place with --out FOLDER; such a folder is never overwritten"};
  if (!replace)
    return Error{ErrorKind::usage, "the run folder '" + path + "' exists already", path,
                 "give --replace to overwrite that run, or another place with --out FOLDER"};
  return {};
}

/// Removes what a run wrote, and nothing else. Links are removed, never followed.
Status remove_run(const fs::path& folder) {
  std::error_code code;
  for (const auto name : kRunFiles) {
    for (const auto& end : {"", ".part"}) {
      fs::remove(folder / (std::string(name) + end), code);
      if (code) return folder_error("cannot remove '" + std::string(name) + "'", folder.string(), code);
    }
  }
  fs::remove(folder / kPlanFile, code);
  if (!code) fs::remove_all(folder / kStateFolder, code);
  if (code) return folder_error("cannot remove the earlier run", folder.string(), code);
  return {};
}

/// A full disk or a missing permission must show before hours of work, not after.
Status check_writable(const fs::path& folder) {
  const std::string probe = (folder / ".write-check").string();
  const Status written = write_file(probe, "formsieve\n");
  std::error_code ignored;
  fs::remove(probe, ignored);
  if (written) return {};
  return Error{ErrorKind::io, "no file can be written in the run folder: " + written.error().message, folder.string(),
               "choose another place with --out FOLDER"};
}

}  // namespace

Status RunFolder::check(const std::string& path, bool replace) {
  if (path.empty()) return Error{ErrorKind::usage, "the run folder has no name", "", "give one with --out FOLDER"};
  const fs::path folder(path);
  std::error_code code;
  const fs::file_status status = fs::status(folder, code);
  if (!fs::exists(status)) return {};
  if (!fs::is_directory(status))
    return Error{ErrorKind::usage, "'" + path + "' is a file, not a folder", path,
                 "choose another place with --out FOLDER"};
  const bool is_empty = fs::is_empty(folder, code);
  if (code) return folder_error("cannot look into the folder", path, code);
  return is_empty ? Status() : may_replace(folder, replace);
}

Result<RunFolder> RunFolder::create(const std::string& path, bool replace) {
  if (Status allowed = check(path, replace); !allowed) return allowed.error();
  const fs::path folder(path);
  std::error_code code;
  fs::create_directories(folder, code);
  if (code) return folder_error("cannot make the run folder", path, code);
  if (!fs::is_empty(folder, code))
    if (Status removed = remove_run(folder); !removed) return removed.error();
  if (code) return folder_error("cannot look into the folder", path, code);
  if (Status writable = check_writable(folder); !writable) return writable.error();
  return RunFolder(path);
}

Result<RunFolder> RunFolder::open(const std::string& path) {
  std::error_code code;
  const fs::file_status status = fs::status(path, code);
  const std::string hint = "give the folder that a search wrote, such as coldstores.run";
  if (!fs::exists(status)) return Error{ErrorKind::io, "there is no run folder '" + path + "'", path, hint};
  if (!fs::is_directory(status)) return Error{ErrorKind::io, "'" + path + "' is not a folder", path, hint};
  if (!holds_run_files(path)) return Error{ErrorKind::io, "the folder '" + path + "' holds no run", path, hint};
  return RunFolder(path);
}

std::string RunFolder::file(std::string_view name) const { return (fs::path(path_) / name).string(); }

Status RunFolder::write(std::string_view name, std::string_view text) const { return write_file(file(name), text); }

Result<std::string> RunFolder::read(std::string_view name) const { return read_file(file(name)); }

std::string default_folder(const Plan& plan) {
  const fs::path source(plan.path.empty() ? plan.data.file : plan.path);
  const std::string stem = source.stem().string();
  return (stem.empty() ? std::string("formsieve") : stem) + ".run";
}

std::string folds_csv(std::span<const std::size_t> line_of_row,
                      std::span<const std::span<const std::uint32_t>> fold_of) {
  std::string text = "line";
  for (std::size_t r = 0; r < fold_of.size(); ++r) text += ",fold_" + std::to_string(r + 1);
  text += "\r\n";
  for (std::size_t i = 0; i < line_of_row.size(); ++i) {
    text += std::to_string(line_of_row[i]);
    for (const auto& folds : fold_of) {
      text += ',';
      text += std::to_string(folds[i] + 1);
    }
    text += "\r\n";
  }
  return text;
}

}  // namespace formsieve::run

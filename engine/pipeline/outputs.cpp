#include "pipeline/outputs.hpp"

#include <formsieve/report.hpp>

#include <spdlog/sinks/basic_file_sink.h>
#include <spdlog/spdlog.h>

#include <filesystem>
#include <span>
#include <system_error>

namespace formsieve::pipeline {

namespace {

/// The plan as it must read in `folder` to find its table: the name made relative to the folder, so that both can move
/// together, or absolute where there is no such way.
run::Plan seen_from(const std::string& folder, run::Plan plan) {
  namespace fs = std::filesystem;
  std::error_code failure;
  const fs::path data = fs::absolute(data_path(plan), failure);
  if (failure) return plan;
  const fs::path relative = fs::relative(data, folder, failure);
  plan.data.file = failure || relative.empty() ? data.string() : relative.generic_string();
  return plan;
}

}  // namespace

std::string folder_name(const run::Plan& plan, const std::optional<std::string>& out) {
  return out ? *out : run::default_folder(plan);
}

Outputs::Outputs(run::RunFolder folder, std::shared_ptr<spdlog::logger> log)
    : folder_(std::move(folder)), log_(std::move(log)) {}

Outputs::~Outputs() { log_->flush(); }

Result<std::unique_ptr<Outputs>> Outputs::open(const std::string& path, bool replace) {
  auto folder = run::RunFolder::create(path, replace);
  if (!folder) return folder.error();
  try {
    auto sink = std::make_shared<spdlog::sinks::basic_file_sink_mt>(folder->file(run::kLogFile), true);
    auto log = std::make_shared<spdlog::logger>("formsieve", std::move(sink));
    log->flush_on(spdlog::level::info);
    return std::unique_ptr<Outputs>(new Outputs(std::move(*folder), std::move(log)));
  } catch (const spdlog::spdlog_ex& problem) {
    return Error{ErrorKind::io, std::string("cannot open the log: ") + problem.what(), path,
                 "choose another place with --out FOLDER"};
  }
}

Status Outputs::write_inputs(const Prepared& prepared, const run::Plan& plan) {
  if (auto status = folder_.write(run::kPlanFile, run::write_plan(seen_from(folder_.path(), plan))); !status)
    return status;
  if (auto status = folder_.write(run::kSurveyFile, report::survey_json(prepared.survey)); !status) return status;
  const std::vector<std::size_t> lines = lines_of(prepared.table);
  std::vector<std::span<const std::uint32_t>> folds(prepared.folds.fold_of.begin(), prepared.folds.fold_of.end());
  return folder_.write(run::kFoldsFile, run::folds_csv(lines, folds));
}

Status Outputs::write_shortlist(const judge::Shortlist& shortlist) {
  if (auto status = folder_.write(run::kShortlistJsonFile, report::shortlist_json(shortlist)); !status) return status;
  return folder_.write(run::kShortlistCsvFile, report::shortlist_csv(shortlist));
}

Status Outputs::write_models(const model::ModelSet& models) {
  return folder_.write(run::kModelsFile, report::models_json(models));
}

}  // namespace formsieve::pipeline

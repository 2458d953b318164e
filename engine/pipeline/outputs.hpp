// What a search leaves in its run folder.
#pragma once

#include <formsieve/judge.hpp>
#include <formsieve/model.hpp>
#include <formsieve/run.hpp>

#include "pipeline/prepare.hpp"
#include "run/folder.hpp"

#include <memory>
#include <string>

namespace spdlog {
class logger;
}

namespace formsieve::pipeline {

/// Where the run folder goes: `out`, or the plan's or table's name + ".run" in the working directory.
std::string folder_name(const run::Plan& plan, const std::optional<std::string>& out);

/// The open run folder of one search and its log.
class Outputs {
 public:
  /// Creates the folder and opens log.txt. Errors (kind io or usage) as run::RunFolder::create reports them.
  static Result<std::unique_ptr<Outputs>> open(const std::string& path, bool replace);
  ~Outputs();

  spdlog::logger& log() { return *log_; }
  const std::string& path() const { return folder_.path(); }

  /// plan.toml, survey.json and folds.csv, before the screen starts.
  Status write_inputs(const Prepared& prepared, const run::Plan& plan);
  /// shortlist.json and shortlist.csv.
  Status write_shortlist(const judge::Shortlist& shortlist);
  /// models.json.
  Status write_models(const model::ModelSet& models);

 private:
  Outputs(run::RunFolder folder, std::shared_ptr<spdlog::logger> log);
  run::RunFolder folder_;
  std::shared_ptr<spdlog::logger> log_;
};

}  // namespace formsieve::pipeline

// Room pipeline: one search from plan to run folder. Wires the rooms; alone it logs, reads clocks and listens for
// cancellation. May call: every room.
#pragma once

#include <formsieve/base.hpp>
#include <formsieve/comparison.hpp>
#include <formsieve/judge.hpp>
#include <formsieve/run.hpp>
#include <formsieve/survey.hpp>

#include <functional>
#include <optional>
#include <stop_token>
#include <string>

namespace formsieve::pipeline {

/// What the count and calibration say before the screen starts.
struct Announcement {
  std::string candidates;  ///< decimal, exact
  std::size_t n_responses = 0, n_predictors = 0, n_forms = 0;
  std::size_t rows_read = 0, rows_used = 0, folds = 0, repeats = 1;
  double seconds_estimate = 0.0;   ///< of the whole run; negative when nobody can say
  std::string strategy;            ///< how the space is searched and why, one sentence
  std::vector<std::string> notes;  ///< struck and merged forms, dropped rows, folds reduced
};

/// Per-call settings that are not part of the plan.
struct SearchOptions {
  std::optional<std::string> out;  ///< run folder; default the plan's or table's name + ".run" in the working directory
  bool replace = false;            ///< an existing run folder may be overwritten
  unsigned threads = 0;            ///< 0: all that the process may use (affinity, cgroup)
  ProgressSink progress;           ///< may be empty
  std::function<void(const Announcement&)> announce;  ///< may be empty
};

struct SearchOutcome {
  judge::Shortlist shortlist;
  std::string run_folder;
  bool stopped_early = false;  ///< cancelled or out of budget; the shortlist covers what was scored
};

/// Runs a search and writes the run folder (plan.toml, survey.json, shortlist.json, shortlist.csv, folds.csv, log.txt).
/// Cancellation through `stop` ends the screen early and still examines what was pooled. The shortlist does not depend
/// on the threads. Errors: plan, data, io as the rooms report them; plan when the space is too large for the budget,
/// with what to change.
Result<SearchOutcome> search(const run::Plan& plan, const SearchOptions& options, std::stop_token stop = {});

/// Reads a table as the plan's data section says.
Result<table::Table> load_table(const run::Plan& plan, unsigned threads = 0);

/// Profiles the columns of the plan's table; no regression.
Result<survey::Survey> survey(const run::Plan& plan, unsigned threads = 0);

/// A commented plan for the table and response, which runs as it is.
Result<std::string> draft(const run::Plan& plan, unsigned threads = 0);

/// Reads the shortlist of a run folder.
Result<judge::Shortlist> open_run(const std::string& run_folder);

/// Two to five listed candidates of a run folder side by side, by rank. The plan and the table of the run are read
/// again and the candidates refitted; where the table has changed or cannot be read, the comparison holds what the
/// shortlist alone gives, and says what is missing. Errors: the run folder cannot be read; kind usage for ranks that
/// are not listed, are named twice, or are fewer than two or more than five.
Result<judge::Comparison> compare(const std::string& run_folder, const std::vector<std::size_t>& ranks,
                                  unsigned threads = 0);

}  // namespace formsieve::pipeline

// Room pipeline: one search from plan to run folder. Wires the rooms; alone it logs, reads clocks and listens for
// cancellation. May call: every room.
#pragma once

#include <formsieve/base.hpp>
#include <formsieve/comparison.hpp>
#include <formsieve/judge.hpp>
#include <formsieve/model.hpp>
#include <formsieve/run.hpp>
#include <formsieve/survey.hpp>
#include <formsieve/table.hpp>

#include <array>
#include <cstddef>
#include <cstdint>
#include <functional>
#include <optional>
#include <stop_token>
#include <string>
#include <string_view>
#include <vector>

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

/// Reads the models of a run folder, each checked. Errors: no run folder, no models in it (io), a broken file (data).
Result<model::ModelSet> open_models(const std::string& run_folder);
/// By rank, or by the name of a line: "7", "recommended". Errors (kind usage) with what there is.
Result<const model::Model*> find_model(const model::ModelSet& set, const std::string& rank_or_mark);
/// How the table of a run folder was read: its plan's settings for missing values, for tables of the same origin.
Result<run::Plan> open_plan(const std::string& run_folder);

/// Bytes of a block of rows: enough that starting one costs nothing, few enough to stay in the second cache with what
/// is made of them.
inline constexpr std::size_t kApplyBlockBytes = std::size_t{1} << 18;

struct ApplyOptions {
  std::string source;                          ///< names the table in messages
  table::CsvOptions csv;                       ///< how the table is written; `text` is not used
  std::vector<std::string> keep;               ///< columns of the table to copy in front of the scores
  double level = 0.95;                         ///< of the intervals
  bool json = false;                           ///< one JSON object a row instead of CSV
  unsigned threads = 0;                        ///< 0: all that the process may use; the output does not depend on it
  std::size_t block_bytes = kApplyBlockBytes;  ///< nor on this
  ProgressSink progress;                       ///< may be empty
};

/// What became of the rows.
struct ApplySummary {
  std::uint64_t rows = 0;
  std::uint64_t scored = 0;                               ///< rows with a prediction
  std::uint64_t flagged = 0;                              ///< rows with any flag
  std::array<std::uint64_t, model::kFlags> by_flag = {};  ///< rows with each, by bit of model::Flag
  bool has_normal = true, has_cross = true;  ///< whether the model has intervals of the kind; empty columns otherwise
  bool stopped_early = false;                ///< by `stop` or because the sink wanted no more
};

/// Takes a piece of the output. False: no more is wanted (a reader that has gone). Errors are passed on.
using TextSink = std::function<Result<bool>(std::string_view)>;

/// Scores the rows of a text by one model, as CSV (RFC 4180, decimal point, ten significant digits) or JSON lines:
/// the kept columns, then mean, median, low_normal, high_normal, low_cv, high_cv in own units, and flags
/// ("outside floor_area; leverage"). A value that does not exist is an empty cell (null). Rows come out in order,
/// blocks of fixed size are read, scored on several threads and written, so that memory does not grow with the table;
/// neither threads nor block size change a byte. With a weight column in the model, a row's weight is taken from the
/// column of that name where the table has it and the cell is not empty, otherwise w = 1.
///
/// Errors: those of reading a table (file, line and column; rows before the faulty block have been written), a column
/// that the model needs and the table has not (kind data, what is near), a column to keep that is not there (usage).
/// About a million rows a second and core for ten terms.
Result<ApplySummary> apply(const model::ModelSet& set, const model::Model& model, const table::ByteStream& text,
                           const ApplyOptions& options, const TextSink& sink, std::stop_token stop = {});

}  // namespace formsieve::pipeline

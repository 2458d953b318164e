// New rows scored by a model of a run folder, block by block.
#include <formsieve/pipeline.hpp>
#include <formsieve/report.hpp>

#include "base/parallel.hpp"
#include "pipeline/apply_rows.hpp"
#include "pipeline/guarded.hpp"
#include "pipeline/meter.hpp"
#include "report/value_text.hpp"
#include "run/folder.hpp"

#include <algorithm>
#include <limits>
#include <memory>

namespace formsieve::pipeline {

namespace {

void add(ApplySummary& total, const ApplySummary& part) {
  total.rows += part.rows;
  total.scored += part.scored;
  total.flagged += part.flagged;
  for (std::size_t bit = 0; bit < total.by_flag.size(); ++bit) total.by_flag[bit] += part.by_flag[bit];
}

/// Reads blocks, hands them to the threads, writes what they made in order.
class Applying {
 public:
  Applying(const ApplyTask& task, table::RowStream& stream, const ApplyOptions& options, const TextSink& sink,
           Meter& meter)
      : task_(task),
        stream_(stream),
        sink_(sink),
        meter_(meter),
        threads_(options.threads == 0 ? base::available_threads() : options.threads) {
    for (unsigned i = 0; i < threads_; ++i) scorers_.push_back(std::make_unique<BlockScorer>(task));
  }

  Result<ApplySummary> run() {
    while (!summary_.stopped_early) {
      const bool more = read_blocks();
      std::vector<Status> status(blocks_.size());
      base::parallel_for(blocks_.size(), threads_, [&](std::size_t i) { status[i] = scorers_[i]->run(blocks_[i]); });
      for (std::size_t i = 0; i < blocks_.size() && !summary_.stopped_early; ++i) {
        if (!status[i]) return status[i].error();
        if (auto written = write(i); !written) return written.error();
      }
      if (failure_) return *failure_;
      if (!more) break;
      if (meter_.stopped()) summary_.stopped_early = true;
    }
    return summary_;
  }

 private:
  /// One block a thread; false when these are the last. A failure waits until what came before it has been written, so
  /// that the output up to it is the same for any number of threads.
  bool read_blocks() {
    blocks_.clear();
    while (blocks_.size() < threads_) {
      Result<std::optional<table::RowBlock>> block = stream_.next();
      if (!block) failure_ = block.error();
      if (failure_ || !*block) return false;
      blocks_.push_back(**std::move(block));
    }
    return true;
  }

  Status write(std::size_t i) {
    const Result<bool> wanted = sink_(scorers_[i]->text());
    if (!wanted) return wanted.error();
    summary_.stopped_early = !*wanted;
    add(summary_, scorers_[i]->counts());
    meter_.add(blocks_[i].bytes.size());
    return {};
  }

  const ApplyTask& task_;
  table::RowStream& stream_;
  const TextSink& sink_;
  Meter& meter_;
  unsigned threads_;
  std::vector<std::unique_ptr<BlockScorer>> scorers_;
  std::vector<table::RowBlock> blocks_;
  std::optional<Error> failure_;  ///< of reading
  ApplySummary summary_;
};

std::vector<std::string> json_names(const std::vector<std::string>& header, const ApplyColumns& columns) {
  std::vector<std::string> names;
  for (const std::size_t column : columns.keep) report::append_json_string(names.emplace_back(), header[column]);
  return names;
}

Result<ApplySummary> apply_all(const model::ModelSet& set, const model::Model& model, const table::ByteStream& text,
                               const ApplyOptions& options, const TextSink& sink, std::stop_token stop) {
  if (!(options.level > 0.0 && options.level < 1.0))
    return Error{ErrorKind::usage, "the level of the intervals must lie between 0 and 1", "", "for example 0.95"};
  table::RowStream stream(text.read, options.source, options.csv, options.block_bytes);
  if (auto status = stream.open(); !status) return status.error();
  const auto columns = find_columns(stream.header(), set, model, options);
  if (!columns) return columns.error();
  const model::Scorer scorer(model, options.level);
  const ApplyTask task{stream,       scorer,
                       *columns,     set.weight,
                       options.json, options.json ? json_names(stream.header(), *columns) : std::vector<std::string>()};
  Meter meter(options.progress, std::numeric_limits<double>::infinity(), std::move(stop));
  meter.begin("scoring", static_cast<double>(text.n_bytes), "bytes");
  if (!options.json)
    if (auto written = sink(csv_header(stream.header(), *columns)); !written) return written.error();
  auto summary = Applying(task, stream, options, sink, meter).run();
  meter.end();
  if (!summary) return summary;
  summary->has_normal = scorer.has_normal();
  summary->has_cross = scorer.has_cross();
  return summary;
}

}  // namespace

Result<ApplySummary> apply(const model::ModelSet& set, const model::Model& model, const table::ByteStream& text,
                           const ApplyOptions& options, const TextSink& sink, std::stop_token stop) {
  return guarded(options.source, [&] { return apply_all(set, model, text, options, sink, std::move(stop)); });
}

Result<const model::Model*> find_model(const model::ModelSet& set, const std::string& rank_or_mark) {
  return model::find_model(set, rank_or_mark);
}

Result<model::ModelSet> open_models(const std::string& run_folder) {
  const auto folder = run::RunFolder::open(run_folder);
  if (!folder) return folder.error();
  const std::string path = folder->file(run::kModelsFile);
  const auto text = folder->read(run::kModelsFile);
  if (!text) {
    Error error = text.error();
    error.hint = "the run is unfinished, or of a version that did not write it: run the search again";
    return error;
  }
  auto set = report::read_models_json(*text, path);
  if (!set) return set;
  for (const model::Model& model : set->models) {
    if (const Status status = model::check(model); !status) {
      Error error = status.error();
      error.where = path;
      return error;
    }
  }
  return set;
}

Result<run::Plan> open_plan(const std::string& run_folder) {
  const auto folder = run::RunFolder::open(run_folder);
  if (!folder) return folder.error();
  return run::read_plan(folder->file(run::kPlanFile));
}

}  // namespace formsieve::pipeline

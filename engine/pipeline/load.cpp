#include <formsieve/pipeline.hpp>

#include <formsieve/report.hpp>
#include <formsieve/table.hpp>

#include "pipeline/guarded.hpp"
#include "pipeline/prepare.hpp"
#include "run/folder.hpp"

#include <filesystem>

namespace formsieve::pipeline {

namespace {

table::CsvOptions csv_options(const run::Plan& plan, unsigned threads) {
  table::CsvOptions options;
  if (plan.data.separator)
    options.separator = *plan.data.separator == "tab" ? '\t' : *plan.data.separator == "semicolon" ? ';' : ',';
  if (plan.data.decimal) options.decimal = *plan.data.decimal == "comma" ? ',' : '.';
  if (plan.data.missing) options.missing = *plan.data.missing;
  options.text = plan.data.text;
  options.threads = threads;
  return options;
}

}  // namespace

std::string data_path(const run::Plan& plan) {
  const std::filesystem::path file(plan.data.file);
  if (plan.path.empty() || file.is_absolute()) return plan.data.file;
  return (std::filesystem::path(plan.path).parent_path() / file).string();
}

Result<table::Table> load_table(const run::Plan& plan, unsigned threads) {
  const std::string path = data_path(plan);
  if (plan.data.query) return table::read_sqlite(path, *plan.data.query);
  return table::read_csv(path, csv_options(plan, threads));
}

namespace {

Result<survey::Survey> profile_table(const run::Plan& plan, unsigned threads) {
  const auto loaded = load_table(plan, threads);
  if (!loaded) return loaded.error();
  survey::Options options;
  options.bounds = plan.data.bounds;
  options.rare_level_count = plan.data.rare_levels;
  options.ignore = plan.data.ignore;
  options.response = plan.data.response;
  options.threads = threads;
  return survey::profile(*loaded, options);
}

}  // namespace

Result<survey::Survey> survey(const run::Plan& plan, unsigned threads) {
  return guarded(plan.data.file, [&] { return profile_table(plan, threads); });
}

Result<judge::Shortlist> open_run(const std::string& run_folder) {
  const auto folder = run::RunFolder::open(run_folder);
  if (!folder) return folder.error();
  const auto text = folder->read(run::kShortlistJsonFile);
  if (!text) return text.error();
  return report::read_shortlist_json(*text, folder->file(run::kShortlistJsonFile));
}

}  // namespace formsieve::pipeline

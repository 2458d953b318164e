// Speed of scoring new rows on one thread, CSV in to CSV out, by a model of ten terms under ln(y) with ten folds,
// beside merely reading the same cells by the same reader, and beside scoring one row after another by the plain
// functions (without reading and writing).
//
//   apply_bench [ROWS]
#include "made_model.hpp"
#include "stopwatch.hpp"

#include "pipeline/apply_rows.hpp"

#include <formsieve/pipeline.hpp>

#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <iostream>
#include <random>
#include <string>
#include <vector>

namespace {

using namespace formsieve;

constexpr std::size_t kTerms = 10;
constexpr std::size_t kFoldsOfModel = 10;
constexpr std::size_t kRowsOfModel = 400;
constexpr std::size_t kPlainRows = 20000;  // the plain way is slow; its rate does not depend on the number
constexpr int kRepeats = 3;

std::vector<forms::Form> ten_forms() {
  using forms::Kind;
  return {{Kind::ln},   {Kind::ln},         {Kind::ln},       {Kind::sqrt},     {Kind::sqrt, {}, 101.0},
          {Kind::sqrt}, {Kind::reciprocal}, {Kind::identity}, {Kind::identity}, {Kind::identity}};
}

/// As a search would leave it: folds whose coefficients differ by about what 400 rows leave open.
model::test::Made ten_term_model() {
  std::mt19937_64 random(20261201);
  std::normal_distribution<double> normal;
  model::test::Made made;
  made.model.response = {forms::Kind::ln};
  made.model.n = kRowsOfModel;
  made.model.sigma = 0.2;
  made.model.largest_leverage = 1.0;
  for (const forms::Form& form : ten_forms())
    made.model.terms.push_back({"x" + std::to_string(made.model.terms.size()), form, 0.5, 100.0, {}});
  made.model.coefficients.assign(kTerms + 1, 0.05);
  for (std::size_t i = 0; i <= kTerms; ++i)
    for (std::size_t j = i; j <= kTerms; ++j) made.model.root.push_back(i == j ? 0.01 : 0.001 * normal(random));
  made.residuals.resize(kRowsOfModel);
  made.held_out.resize(kFoldsOfModel);
  for (std::size_t i = 0; i < kRowsOfModel; ++i) {
    made.residuals[static_cast<Eigen::Index>(i)] = 0.2 * normal(random);
    made.held_out[i % kFoldsOfModel].push_back(0.2 * std::abs(normal(random)));
  }
  model::MeanPart part;
  part.mean_exp = made.residuals.array().exp().mean();
  part.smallest = made.residuals.minCoeff();
  part.residuals.assign(made.residuals.begin(), made.residuals.end());
  made.model.mean.parts = {part};
  for (auto& held : made.held_out) {
    std::sort(held.begin(), held.end());
    model::Fold fold{made.model.coefficients, held, {}};
    for (double& b : fold.coefficients) b += 0.0005 * normal(random);
    made.model.folds.push_back(fold);
  }
  return made;
}

struct Generated {
  std::string csv;
  std::vector<std::vector<double>> rows;  ///< the first kPlainRows
};

Generated generated_table(std::size_t n_rows) {
  std::mt19937_64 random(7);
  std::normal_distribution<double> normal;
  Generated table;
  for (std::size_t t = 0; t < kTerms; ++t) table.csv += (t == 0 ? "x" : ",x") + std::to_string(t);
  table.csv += "\n";
  for (std::size_t i = 0; i < n_rows; ++i) {
    std::vector<double> row;
    for (std::size_t t = 0; t < kTerms; ++t) {
      char cell[32];
      const double value = std::min(99.0, std::max(0.6, std::exp(2.5 + 0.8 * normal(random))));
      std::snprintf(cell, sizeof cell, t % 3 == 0 ? "%.1f" : t % 3 == 1 ? "%.2f" : "%.4f", value);
      table.csv += (t == 0 ? "" : ",") + std::string(cell);
      row.push_back(std::strtod(cell, nullptr));
    }
    table.csv += "\n";
    if (i < kPlainRows) table.rows.push_back(row);
  }
  return table;
}

table::ByteStream stream_of(const std::string& text) {
  return {[&text, at = std::size_t{0}](std::span<char> into) mutable -> Result<std::size_t> {
            const std::size_t n = std::min(into.size(), text.size() - at);
            std::copy_n(text.data() + at, n, into.data());
            at += n;
            return n;
          },
          text.size()};
}

void check(bool holds, const char* what) {
  if (holds) return;
  std::cerr << what << "\n";
  std::exit(1);
}

double apply_seconds(const model::ModelSet& set, const std::string& csv, std::size_t n_rows) {
  pipeline::ApplyOptions options;
  options.source = "generated";
  options.threads = 1;
  std::size_t bytes = 0;
  return bench::best_thread_seconds(kRepeats, [&] {
    const auto summary = pipeline::apply(set, set.models[0], stream_of(csv), options, [&](std::string_view text) {
      bytes += text.size();
      return Result<bool>(true);
    });
    check(summary.ok() && summary->scored == n_rows, "not every row was scored");
  });
}

double reading_seconds(const std::string& csv, std::size_t n_rows) {
  return bench::best_thread_seconds(kRepeats, [&] {
    const table::CsvOptions options;
    table::RowStream stream(stream_of(csv).read, "generated", options, pipeline::kApplyBlockBytes);
    check(stream.open().ok(), "the header cannot be read");
    std::size_t n = 0;
    std::vector<std::vector<double>> columns(kTerms);
    for (;;) {
      const auto block = stream.next();
      check(block.ok(), "the rows cannot be read");
      if (!*block) break;
      std::vector<table::ColumnSink> sinks;
      for (auto& column : columns) {
        column.resize((*block)->n_rows);
        sinks.push_back({table::ReadAs::number, column.data(), nullptr});
      }
      check(stream.read(**block, sinks).ok(), "the cells cannot be read");
      n += (*block)->n_rows;
    }
    check(n == n_rows, "rows were lost");
  });
}

double scoring_seconds(const model::test::Made& made, const std::vector<std::vector<double>>& rows) {
  std::vector<std::vector<double>> columns(kTerms);
  for (const auto& row : rows)
    for (std::size_t t = 0; t < kTerms; ++t) columns[t].push_back(row[t]);
  const model::Scorer scorer(made.model);
  model::Scorer::Workspace work(scorer);
  model::Scores scores;
  return bench::best_thread_seconds(kRepeats, [&] {
    for (std::size_t first = 0; first < rows.size(); first += model::kBatchRows) {
      const std::size_t n = std::min(model::kBatchRows, rows.size() - first);
      std::vector<std::span<const double>> values;
      for (const auto& column : columns) values.emplace_back(column.data() + first, n);
      scorer.score(values, {}, n, work, scores);
    }
  });
}

double plain_seconds(const model::test::Made& made, const std::vector<std::vector<double>>& rows) {
  double total = 0.0;
  const double seconds = bench::thread_seconds([&] {
    for (const auto& row : rows) total += model::test::plain_score(made, row, 1.0).cross.upper;
  });
  check(std::isfinite(total), "a row cannot be scored");
  return seconds;
}

void print_line(const char* what, double rows_a_second, double of_plain) {
  std::printf("| %-62s | %12.0f | %8.1f |\n", what, rows_a_second, rows_a_second / of_plain);
}

}  // namespace

int main(int argc, char** argv) {
  const std::size_t n_rows = argc > 1 ? std::stoul(argv[1]) : 1'000'000;
  const model::test::Made made = ten_term_model();
  const Generated table = generated_table(n_rows);
  const model::ModelSet set{"", "y", "", {made.model}};
  const auto n = static_cast<double>(n_rows);
  const auto n_plain = static_cast<double>(table.rows.size());
  const double plain = n_plain / plain_seconds(made, table.rows);
  std::printf("%zu rows, %.1f MB, one thread (processor time, best of %d)\n", n_rows,
              static_cast<double>(table.csv.size()) / 1e6, kRepeats);
  std::printf("| %-62s | rows a second | times the plain way |\n|---|---|---|\n", "ten terms, ln(y), ten folds");
  print_line("apply, CSV in to CSV out", n / apply_seconds(set, table.csv, n_rows), plain);
  print_line("reading alone", n / reading_seconds(table.csv, n_rows), plain);
  print_line("scoring alone, in batches", n_plain / scoring_seconds(made, table.rows), plain);
  print_line("scoring alone, row by row by the plain functions", plain, plain);
}

// One block of new rows: from cells to scores to text.
#pragma once

#include <formsieve/pipeline.hpp>

#include "model/scorer.hpp"
#include "table/row_stream.hpp"

#include <array>
#include <cstddef>
#include <cstdint>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

namespace formsieve::pipeline {

/// Which column of the new table is what.
struct ApplyColumns {
  std::vector<std::size_t> of_term;  ///< [terms of the model]
  std::optional<std::size_t> weight;
  std::vector<std::size_t> keep;
  std::vector<table::ReadAs> read_as;  ///< [columns of the table]
};

/// Finds the columns by name. Errors as pipeline::apply.
Result<ApplyColumns> find_columns(const std::vector<std::string>& header, const model::ModelSet& set,
                                  const model::Model& model, const ApplyOptions& options);

/// The line of column names that CSV output begins with.
std::string csv_header(const std::vector<std::string>& header, const ApplyColumns& columns);

/// What is the same for every block.
struct ApplyTask {
  const table::RowStream& stream;
  const model::Scorer& scorer;
  const ApplyColumns& columns;
  std::string weight_column;
  bool json = false;
  std::vector<std::string> names;  ///< JSON only: the keys of the kept columns, with quotes
};

/// Reads, scores and writes out blocks, one after the other; one object a thread, whose memory is used again.
class BlockScorer {
 public:
  explicit BlockScorer(const ApplyTask& task);

  /// Rows of the block as text, in text(); counts in counts().
  Status run(const table::RowBlock& block);
  std::string_view text() const { return text_; }
  const ApplySummary& counts() const { return counts_; }

 private:
  void prepare_sinks(std::size_t n_rows);
  void code_levels(const table::BlockReading& reading, std::size_t n_rows);
  void score_batch(std::size_t first, std::size_t n);
  void write_row(std::size_t row, std::size_t in_batch);
  void write_kept(std::size_t row);
  void write_csv_values(std::size_t in_batch);
  void write_json_values(std::size_t in_batch);
  std::string flag_list(std::size_t row, std::size_t in_batch, std::string_view between) const;

  const ApplyTask& task_;
  std::vector<std::vector<double>> numbers_;         ///< [terms + 1] the last for weights
  std::vector<std::vector<std::uint32_t>> codes_;    ///< [terms]
  std::vector<std::vector<std::string_view>> kept_;  ///< [keep]
  std::vector<table::ColumnSink> sinks_;
  model::Scorer::Workspace work_;
  model::Scores scores_;
  std::string text_, scratch_;
  ApplySummary counts_;
};

}  // namespace formsieve::pipeline

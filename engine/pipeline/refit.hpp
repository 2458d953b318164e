// The table of an earlier run prepared again, and its candidates refitted: for what a run folder does not hold.
#pragma once

#include <formsieve/judge.hpp>

#include "fit/least_squares.hpp"
#include "pipeline/prepare.hpp"

#include <Eigen/Core>

#include <cstddef>
#include <string>
#include <vector>

namespace formsieve::pipeline {

/// The run's plan, table and menus as its search saw them. Errors: the plan or the table cannot be read; kind data when
/// the table is another one than that of the run (`recorded`: its SHA-256 and rows), with what to do.
Result<Prepared> prepare_again(const std::string& run_folder, const judge::DataSummary& recorded, unsigned threads);

/// One candidate on all rows in use.
struct Refit {
  Eigen::MatrixXd x;         ///< [n × k], intercept first
  Eigen::VectorXd response;  ///< [n] on the form's scale
  fit::Fit fit;
  std::vector<double> mean_own;     ///< [n] means by the correction in use
  std::vector<double> log_density;  ///< [n] ln density of the measured value, own units
};

/// Refits recorded candidates. Errors (kind data): a number that names another candidate in this space than it did (the
/// run was written by another version), a fit that is not possible. Cost O(n k²) each.
Result<std::vector<Refit>> refit(const Prepared& prepared, const std::vector<judge::Candidate>& recorded,
                                 unsigned threads);

/// The raw value of a cell in as many digits as it has; empty for an unknown column.
std::string cell_text(const table::Table& table, const std::string& column, std::size_t row);

}  // namespace formsieve::pipeline

// Room design: complete-case rows, design columns, folds, Gram blocks. Knows nothing of the order of the search. May
// call: base, table, forms.
#pragma once

#include <formsieve/base.hpp>
#include <formsieve/forms.hpp>
#include <formsieve/table.hpp>

#include "base/gram.hpp"

#include <Eigen/Core>

#include <cstddef>
#include <cstdint>
#include <optional>
#include <span>
#include <string>
#include <utility>
#include <vector>

namespace formsieve::design {

/// The one row set of a run: rows complete in every needed column.
struct RowSet {
  std::vector<std::size_t> rows;  ///< indices into the table, rising
  std::vector<std::pair<std::string, std::size_t>>
      dropped;  ///< column → rows dropped, counted at the first missing column in table order
};
/// Errors (kind data): no row is complete, a column that does not exist.
Result<RowSet> complete_rows(const table::Table& table, std::span<const std::string> columns);

struct Predictor {
  std::string column;
  bool text = false;
  bool always = false;
  std::vector<double> raw;  ///< [n_rows] values, or level codes in the coding of menu[0] for text
  std::vector<forms::Form> menu;
};

/// The rows in use, by column, and every form that may be made of them. Immutable once built.
struct Data {
  std::size_t n_rows = 0;
  std::vector<double> response;  ///< [n_rows] own units
  std::vector<forms::Form> response_forms;
  std::vector<Predictor> predictors;   ///< in plan order
  std::vector<double> weights;         ///< [n_rows] precisions, or empty
  std::vector<std::size_t> table_row;  ///< [n_rows] where each row stands in the table
};

/// Where each form's columns stand: block[j][f] = {first column, number of columns} in the order predictors × menu.
struct Layout {
  std::vector<std::vector<std::pair<std::size_t, std::size_t>>> block;
  std::size_t n_columns = 0;
};
Layout layout(const Data& data);

/// Design matrix of one candidate: intercept first, then the columns of choice[j] (0 absent, 1 + form index), in plan
/// order. [rows.size() × k]. `rows` indexes Data rows.
Eigen::MatrixXd design_matrix(const Data& data, std::span<const std::uint16_t> choice,
                              std::span<const std::size_t> rows);

/// Response under a form for the given rows.
Eigen::VectorXd response_vector(const Data& data, std::size_t response_form, std::span<const std::size_t> rows);

enum class FoldKind { shuffled, grouped, ordered, given };

struct Folds {
  FoldKind kind = FoldKind::shuffled;
  std::size_t count = 0;  ///< folds in each repeat
  std::size_t repeats = 1;
  std::uint64_t seed = 0;
  std::vector<std::vector<std::uint32_t>> fold_of;  ///< [repeats][n_rows], 0 … count−1
  std::vector<std::string> remarks;                 ///< "10 folds asked for, 6 rows: 6 used"
};

struct FoldRequest {
  std::size_t count = 10, repeats = 1;
  std::uint64_t seed = 20261201;
  const table::Column* group = nullptr;  ///< at most one of these three
  const table::Column* order = nullptr;
  const table::Column* given = nullptr;
};
/// Shuffled: rows shuffled by the seed and dealt round-robin. Grouped: groups shuffled, each dealt whole to the fold
/// with fewest rows. Ordered: contiguous blocks of nearly equal size in rising order of the column (ties in table
/// order). Given: one fold a distinct value, in rising order. The same seed gives the same folds on every machine.
/// Errors (kind data or plan): fewer than two folds possible, more than one of the three columns, repeats with ordered
/// or given folds.
Result<Folds> make_folds(std::span<const std::size_t> table_rows, const FoldRequest& request);

/// Builds the Gram matrices in fixed blocks of rows, forms on the fly, with a fixed reduction: the same bits for any
/// number of threads. Columns without spread, on all rows or on the training rows of a fold, become zeros there. Cost
/// O(n · order²). Errors (kind data): a form undefined on a row in use, with its label and table row, a response that
/// is the same on every row, a weight that is not a positive number.
Result<base::GramSet> build_grams(const Data& data, const Folds& folds, unsigned threads);

/// What a set of Gram matrices is made from, as far as memory is concerned.
struct GramSize {
  std::size_t n_rows = 0;
  std::size_t n_columns = 0, n_responses = 1;
  std::size_t folds = 0, repeats = 1;
  bool weighted = false;
  std::size_t n_own_units = 0;  ///< responses with held-out matrices in own units

  std::size_t order() const { return n_columns + n_responses; }
};
/// Bytes of the matrices: (1 + 2 · folds · repeats) · order² numbers, and folds · repeats · (n_columns + 2)² for each
/// response in own units.
double gram_bytes(const GramSize& size);
/// Bytes that build_grams takes beyond those matrices at its widest moment, within a few per cent: the sums of all
/// parts of one repeat, the sums of the folds, and the blocks of rows of each thread.
double gram_building_bytes(const GramSize& size, unsigned threads);

}  // namespace formsieve::design

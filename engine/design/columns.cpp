#include "design/design.hpp"

#include <cassert>

namespace formsieve::design {

Layout layout(const Data& data) {
  Layout result;
  for (const Predictor& predictor : data.predictors) {
    auto& blocks = result.block.emplace_back();
    for (const forms::Form& form : predictor.menu) {
      const std::size_t n_columns = forms::n_columns(form);
      blocks.emplace_back(result.n_columns, n_columns);
      result.n_columns += n_columns;
    }
  }
  return result;
}

namespace {

/// Values of one form on some rows, into consecutive columns of a column-major matrix.
void fill(const forms::Form& form, const std::vector<double>& raw, std::span<const std::size_t> rows, double* out) {
  std::vector<double> x;
  x.reserve(rows.size());
  for (const std::size_t row : rows) x.push_back(raw[row]);
  forms::evaluate_column(form, x, {out, forms::n_columns(form) * rows.size()});
}

}  // namespace

Eigen::MatrixXd design_matrix(const Data& data, std::span<const std::uint16_t> choice,
                              std::span<const std::size_t> rows) {
  assert(choice.size() == data.predictors.size());
  std::size_t n_columns = 1;
  for (std::size_t j = 0; j < choice.size(); ++j)
    if (choice[j] != 0) n_columns += forms::n_columns(data.predictors[j].menu[choice[j] - 1u]);
  Eigen::MatrixXd matrix(static_cast<Eigen::Index>(rows.size()), static_cast<Eigen::Index>(n_columns));
  matrix.col(0).setOnes();
  double* next = matrix.data() + rows.size();
  for (std::size_t j = 0; j < choice.size(); ++j) {
    if (choice[j] == 0) continue;
    const forms::Form& form = data.predictors[j].menu[choice[j] - 1u];
    fill(form, data.predictors[j].raw, rows, next);
    next += forms::n_columns(form) * rows.size();
  }
  return matrix;
}

Eigen::VectorXd response_vector(const Data& data, std::size_t response_form, std::span<const std::size_t> rows) {
  Eigen::VectorXd vector(static_cast<Eigen::Index>(rows.size()));
  fill(data.response_forms[response_form], data.response, rows, vector.data());
  return vector;
}

}  // namespace formsieve::design

#include "fit/input_check.hpp"

#include <cassert>
#include <cmath>
#include <limits>
#include <string>
#include <utility>

namespace formsieve::fit {

namespace {

Error data_error(std::string message, std::string where, std::string hint) {
  return {ErrorKind::data, std::move(message), std::move(where), std::move(hint)};
}

std::string at_row(Eigen::Index row) { return "row " + std::to_string(row + 1) + " of the rows in use"; }

}  // namespace

Status check_input(const Eigen::Ref<const Eigen::MatrixXd>& x, const Eigen::Ref<const Eigen::VectorXd>& y,
                   const Eigen::Ref<const Eigen::VectorXd>& weights) {
  assert(x.cols() >= 1 && y.size() == x.rows() && (weights.size() == 0 || weights.size() == x.rows()));
  if (x.rows() < x.cols()) return too_few_rows_error(x.rows(), x.cols());
  for (Eigen::Index j = 0; j < x.cols(); ++j) {
    if ((x.col(j).array() * 0.0).sum() == 0.0) continue;  // ∞·0 and NaN·0 are NaN; the sum is one fast pass
    Eigen::Index i = 0;
    while (std::isfinite(x(i, j))) ++i;
    return data_error("the design has a value that is not finite", at_row(i) + ", design column " + std::to_string(j),
                      "strike the form that is undefined there");
  }
  assert((x.col(0).array() == 1.0).all() && "column 0 is the intercept");
  for (Eigen::Index i = 0; i < y.size(); ++i) {
    if (!std::isfinite(y(i))) {
      return data_error("the response under its form is not finite", at_row(i),
                        "strike the response form that is undefined there");
    }
  }
  for (Eigen::Index i = 0; i < weights.size(); ++i) {
    if (!(weights(i) > 0.0) || !std::isfinite(weights(i))) {
      return data_error("a weight is not a positive number", at_row(i),
                        "leave the row out, or give it a weight above 0");
    }
  }
  return {};
}

bool does_vary(double deviation_rms, double largest) {
  constexpr double kRounding = 4.0 * std::numeric_limits<double>::epsilon();
  return deviation_rms > kRounding * largest;  // false for NaN
}

Error too_few_rows_error(Eigen::Index n_rows, Eigen::Index n_coefficients) {
  return data_error(
      std::to_string(n_rows) + " rows cannot determine " + std::to_string(n_coefficients) + " coefficients", "",
      "use fewer terms, or more rows");
}

Error dependent_column_error(Eigen::Index column, bool constant) {
  const std::string name = "design column " + std::to_string(column);
  if (constant) {
    return data_error(name + " does not vary on these rows", "", "leave its term out of the candidate");
  }
  return data_error(name + " is a linear combination of the other columns on these rows", "",
                    "leave one of the terms that carry the same information out of the candidate");
}

}  // namespace formsieve::fit

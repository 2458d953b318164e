#include "fit/least_squares.hpp"

#include "fit/input_check.hpp"
#include "fit/standard_columns.hpp"

namespace formsieve::fit {

Result<QuickFit> quick_fit(const Eigen::Ref<const Eigen::MatrixXd>& x, const Eigen::Ref<const Eigen::VectorXd>& y,
                           const Eigen::Ref<const Eigen::VectorXd>& weights) {
  if (const Status input = check_input(x, y, weights); !input.ok()) return input.error();
  const Columns columns{x, y, weights};
  const auto standards = standards_of(columns);
  auto solution = solve_triangle(triangle_of(columns, standards), standards, x.rows());
  if (!solution.ok()) return std::move(solution).error();
  // About the centres, so that columns and response far from zero keep the digits of their spread.
  QuickFit fit{std::move(solution->coefficients), (y.array() - standards.back().centre) - solution->at_centre};
  for (Eigen::Index j = 1; j < x.cols(); ++j) {
    const double centre = standards[static_cast<std::size_t>(j)].centre;
    fit.residuals.array() -= fit.coefficients(j) * (x.col(j).array() - centre);
  }
  return fit;
}

}  // namespace formsieve::fit

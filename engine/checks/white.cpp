#include "checks/white.hpp"

#include "checks/spread.hpp"
#include "checks/words.hpp"

#include <Eigen/QR>

#include <boost/math/distributions/chi_squared.hpp>
#include <boost/math/distributions/fisher_f.hpp>

#include <algorithm>
#include <cmath>

namespace formsieve::checks {

namespace {

using Eigen::Index;

/// A column of which less than this share lies outside those taken before repeats them: squares of an indicator, for
/// example. Between repeats (1e-14) and the closest columns of the worked cases (1e-4).
constexpr double kRepeats = 1e-9;

/// All products of two columns of √n·q for some rows, then the squares.
Eigen::MatrixXd auxiliary_rows(const Eigen::Ref<const Eigen::MatrixXd>& q,
                               const Eigen::Ref<const Eigen::VectorXd>& squares, Index first, Index count) {
  const Index p = q.cols();
  const Eigen::MatrixXd z = q.middleRows(first, count) * std::sqrt(static_cast<double>(q.rows()));
  Eigen::MatrixXd rows(count, white_columns(p) + 1);
  Index at = 0;
  for (Index a = 0; a < p; ++a)
    for (Index b = a; b < p; ++b) rows.col(at++) = z.col(a).cwiseProduct(z.col(b));
  rows.col(at) = squares.segment(first, count);
  return rows;
}

/// Rows of the auxiliary design that are made at a time.
Index chunk_rows(Index columns) {
  constexpr Index kFewest = 1024;
  return std::max(kFewest, 2 * columns);
}

/// The triangle of the whole auxiliary design with the squares in its last column, chunk by chunk.
Eigen::MatrixXd triangle_of(const Eigen::Ref<const Eigen::MatrixXd>& q,
                            const Eigen::Ref<const Eigen::VectorXd>& squares) {
  const Index columns = white_columns(q.cols()) + 1;
  Eigen::MatrixXd triangle(0, columns);
  const Index step = chunk_rows(columns);
  for (Index first = 0; first < q.rows(); first += step) {
    const Index count = std::min(step, q.rows() - first);
    Eigen::MatrixXd stacked(triangle.rows() + count, columns);
    stacked << triangle, auxiliary_rows(q, squares, first, count);
    const Eigen::HouseholderQR<Eigen::MatrixXd> qr(stacked);
    triangle = qr.matrixQR().topRows(std::min(columns, stacked.rows())).triangularView<Eigen::Upper>();
  }
  return triangle;
}

Eigen::VectorXd predictions(const Eigen::Ref<const Eigen::MatrixXd>& q,
                            const Eigen::Ref<const Eigen::VectorXd>& squares, const Eigen::VectorXd& coefficients) {
  Eigen::VectorXd predicted(q.rows());
  const Index step = chunk_rows(coefficients.size() + 1);
  for (Index first = 0; first < q.rows(); first += step) {
    const Index count = std::min(step, q.rows() - first);
    predicted.segment(first, count) =
        auxiliary_rows(q, squares, first, count).leftCols(coefficients.size()) * coefficients;
  }
  return predicted;
}

}  // namespace

Index white_columns(Index p) { return p * (p + 1) / 2; }

std::optional<White> white(const Eigen::Ref<const Eigen::MatrixXd>& q,
                           const Eigen::Ref<const Eigen::VectorXd>& squares) {
  const double n = static_cast<double>(q.rows());
  const Index columns = white_columns(q.cols());
  const Eigen::MatrixXd triangle = triangle_of(q, squares);
  Eigen::VectorXd lengths = triangle.leftCols(columns).colwise().norm().transpose();
  lengths = (lengths.array() > 0.0).select(lengths, 1.0);
  Eigen::ColPivHouseholderQR<Eigen::MatrixXd> qr;
  qr.setThreshold(kRepeats);
  qr.compute(triangle.leftCols(columns) * lengths.cwiseInverse().asDiagonal());
  const Index rank = qr.rank();
  if (rank >= q.rows() || rank < 2) return std::nullopt;
  const Eigen::VectorXd target = triangle.col(columns);
  const Eigen::VectorXd along = (qr.householderQ().adjoint() * target).head(rank);
  Eigen::VectorXd coefficients = Eigen::VectorXd::Zero(columns);  // 0 for what repeats
  coefficients.head(rank) = qr.matrixQR().topLeftCorner(rank, rank).triangularView<Eigen::Upper>().solve(along);
  coefficients = (qr.colsPermutation() * coefficients).cwiseQuotient(lengths);
  White result;
  result.r_squared = std::clamp(along.squaredNorm() / target.squaredNorm(), 0.0, 1.0);
  result.lm = n * result.r_squared;
  result.df = static_cast<double>(rank - 1);
  result.p = boost::math::cdf(boost::math::complement(boost::math::chi_squared(result.df), result.lm));
  const double df2 = n - static_cast<double>(rank);
  constexpr double kLeastUnexplained = 1e-15;  // keeps F a number for squares that the design holds exactly
  result.f = result.r_squared / result.df / (std::max(1.0 - result.r_squared, kLeastUnexplained) / df2);
  result.p_f = boost::math::cdf(boost::math::complement(boost::math::fisher_f(result.df, df2), result.f));
  result.predicted = predictions(q, squares, coefficients);
  return result;
}

namespace {

/// The auxiliary design may have at most n over this many columns: with fewer rows a column χ² is far from n·R².
constexpr Index kRowsPerColumn = 3;
/// … and no more than these, whatever n: twenty design columns give 231.
constexpr Index kMostColumns = 300;
/// n·columns² that are spent on one candidate at most: about a second.
constexpr double kMostWork = 1e9;

std::string why_not(const Workings& workings) {
  if (!workings.untestable.empty()) return workings.untestable;
  if (workings.p < 2) return "no term, so one fitted value";
  if (!workings.plain.full_rank) return "the design columns are not separable without the weights";
  const Index columns = white_columns(workings.p);
  const std::string how_many = std::to_string(columns) + " squares and products of the design columns";
  if (kRowsPerColumn * columns > workings.n) return "too few rows for " + how_many;
  if (columns > kMostColumns || static_cast<double>(workings.n) * static_cast<double>(columns * columns) > kMostWork)
    return how_many + " are too many to be tested together";
  return {};
}

/// The spread that the auxiliary regression sees, √(mean square of the third of rows with the largest predicted square
/// over that with the smallest). What is predicted is first shrunk by adjusted R² over R² (Ezekiel 1930), so that many
/// columns on equal spread give about 1.
double shrunk_ratio(const Workings& workings, const White& test) {
  const double n = static_cast<double>(workings.n);
  const double adjusted = 1.0 - (1.0 - test.r_squared) * (n - 1.0) / (n - 1.0 - test.df);
  if (!(adjusted > 0.0)) return 1.0;
  const double shrink = adjusted / test.r_squared;
  const Thirds thirds = thirds_of(test.predicted);
  const auto mean_square = [&](const std::vector<Index>& rows) {
    return std::max(0.0, 1.0 + shrink * Eigen::VectorXd(test.predicted(rows)).mean());  // squares are over their mean
  };
  return std::sqrt(bounded_ratio(mean_square(thirds.top), mean_square(thirds.bottom)).value_or(1.0));
}

}  // namespace

Check equal_spread_any_shape(const Workings& workings) {
  Check check = named("equal-spread-any-shape", "White, squares and products of the design columns",
                      "the spread of the residuals does not depend on the terms, their squares or their products");
  check.size = 1.0;
  check.size_words = "no spread to compare";
  check.note = why_not(workings);
  if (!check.note.empty()) return check;
  const Eigen::VectorXd squares = centred_squares(workings);
  const auto test = squares.size() > 0 ? white(workings.plain.q, squares) : std::nullopt;
  if (!test) {
    check.note = squares.size() > 0 ? "the squares and products hold every row" : "the squared residuals are all equal";
    return check;
  }
  check.statistic = test->lm;
  check.df = test->df;
  check.p = test->p;
  check.size = shrunk_ratio(workings, *test);
  check.size_words = "where terms, squares and products foresee the widest residuals, these spread " +
                     number_words(check.size) + " times as widely as where they foresee the narrowest";
  note_weights(workings, check);
  return check;
}

}  // namespace formsieve::checks

#include "fit/row_block_kernel.hpp"

#include <Eigen/Core>
#include <catch2/catch.hpp>

#include <algorithm>
#include <random>

using namespace formsieve;

namespace {

void fold_in_block(Eigen::MatrixXd& triangle, const Eigen::Ref<const Eigen::MatrixXd>& rows) {
  Eigen::MatrixXd block(static_cast<Eigen::Index>(fit::kRowBlockStride), rows.cols());
  block.topRows(rows.rows()) = rows;
  fit::fold_in_rows(triangle.data(), block.data(), static_cast<std::size_t>(rows.rows()),
                    static_cast<std::size_t>(rows.cols()));
}

}  // namespace

TEST_CASE("fit: folding in rows keeps the inner products of a plain loop", "[fit][property]") {
  std::mt19937 generator(4);
  std::normal_distribution<double> normal;
  for (const Eigen::Index n : {1, 5, 255, 256, 257, 1000}) {
    const Eigen::Index m = 6;
    Eigen::MatrixXd a(n, m);
    for (Eigen::Index j = 0; j < m; ++j) {
      for (Eigen::Index i = 0; i < n; ++i) a(i, j) = normal(generator);
    }
    Eigen::MatrixXd triangle = Eigen::MatrixXd::Zero(m, m);
    for (Eigen::Index start = 0; start < n; start += static_cast<Eigen::Index>(fit::kRowBlock)) {
      const Eigen::Index rows = std::min(static_cast<Eigen::Index>(fit::kRowBlock), n - start);
      fold_in_block(triangle, a.middleRows(start, rows));
    }
    for (Eigen::Index i = 0; i < m; ++i) {
      for (Eigen::Index j = i; j < m; ++j) {
        double plain = 0.0, folded = 0.0;
        for (Eigen::Index row = 0; row < n; ++row) plain += a(row, i) * a(row, j);
        for (Eigen::Index row = 0; row <= i; ++row) folded += triangle(row, i) * triangle(row, j);
        CHECK(folded == Approx(plain).epsilon(1e-13).margin(1e-12));
      }
      for (Eigen::Index row = i + 1; row < m; ++row) CHECK(triangle(row, i) == 0.0);
    }
  }
}

TEST_CASE("fit: folding in a triangle equals folding in its rows", "[fit][property]") {
  std::mt19937 generator(6);
  std::normal_distribution<double> normal;
  Eigen::MatrixXd one = Eigen::MatrixXd::Zero(5, 5), other = one;
  for (Eigen::Index j = 0; j < 5; ++j) {
    for (Eigen::Index i = 0; i <= j; ++i) {
      one(i, j) = normal(generator);
      other(i, j) = normal(generator);
    }
  }
  Eigen::MatrixXd by_rows = one;
  fold_in_block(by_rows, other);
  fit::fold_in_triangle(one.data(), other.data(), 5);
  CHECK((one - by_rows).cwiseAbs().maxCoeff() < 1e-14);
}

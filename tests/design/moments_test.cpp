#include "base/sums.hpp"
#include "design/cross_product_kernel.hpp"
#include "design/moments.hpp"
#include "example.hpp"
#include "instruction_sets.hpp"

#include <catch2/catch.hpp>

#include <cmath>
#include <limits>
#include <numeric>

using namespace formsieve;
using base::kRowChunk;

namespace {

struct Rows {
  std::size_t n_columns;
  std::vector<std::vector<double>> columns;
  std::vector<double> weights;
};

Rows random_rows(std::uint64_t seed, std::size_t n_rows, std::size_t n_columns) {
  std::mt19937_64 random(seed);
  Rows rows{n_columns, std::vector<std::vector<double>>(n_columns), {}};
  for (std::size_t i = 0; i < n_rows; ++i) {
    for (auto& column : rows.columns) column.push_back(3.0 + test::normal(random));
    rows.weights.push_back(std::exp(test::normal(random)));
  }
  return rows;
}

/// Columns as the kernel packs them.
struct Packed {
  std::size_t n_rows;
  std::vector<double> panels, means;

  double at(std::size_t row, std::size_t c) const {
    constexpr std::size_t kWidth = design::kPanelColumns;
    return panels[c / kWidth * n_rows * kWidth + row * kWidth + c % kWidth];
  }
};

Packed pack(const Rows& rows, const double* weights, double total_weight) {
  const std::size_t n_rows = rows.weights.size();
  std::vector<double> columns;
  for (const auto& column : rows.columns) columns.insert(columns.end(), column.begin(), column.end());
  Packed packed{n_rows, std::vector<double>(design::panels_size(n_rows, rows.n_columns)),
                std::vector<double>(design::padded(rows.n_columns))};
  design::pack_centred(columns.data(), n_rows, n_rows, rows.n_columns, weights, total_weight, packed.panels.data(),
                       packed.means.data());
  return packed;
}

/// Moments of rows [first, last) through the block kernel.
design::Moments moments(const Rows& rows, std::size_t first, std::size_t last, bool weighted) {
  std::vector<double> values(rows.n_columns * kRowChunk);
  for (std::size_t c = 0; c < rows.n_columns; ++c)
    std::copy(rows.columns[c].begin() + static_cast<std::ptrdiff_t>(first),
              rows.columns[c].begin() + static_cast<std::ptrdiff_t>(last),
              values.begin() + static_cast<std::ptrdiff_t>(c * kRowChunk));
  design::BlockWorkspace workspace;
  const auto weights = weighted ? std::span(rows.weights).subspan(first, last - first) : std::span<const double>{};
  return design::moments_of({last - first, rows.n_columns, values.data()}, weights, workspace);
}

/// Every entry against a plain loop in long double, relative to the columns' own.
void check_moments(const design::Moments& moments, const Rows& rows, bool weighted, double tolerance) {
  const std::size_t n = rows.weights.size();
  const auto weight = [&](std::size_t i) { return weighted ? static_cast<long double>(rows.weights[i]) : 1.0L; };
  long double total = 0.0L;
  std::vector<long double> mean(rows.n_columns, 0.0L);
  for (std::size_t i = 0; i < n; ++i) total += weight(i);
  for (std::size_t c = 0; c < rows.n_columns; ++c)
    for (std::size_t i = 0; i < n; ++i) mean[c] += weight(i) * rows.columns[c][i] / total;
  CHECK(moments.weight == Approx(static_cast<double>(total)).epsilon(1e-14));
  for (std::size_t a = 0; a < rows.n_columns; ++a) {
    CHECK(moments.mean[a] == Approx(static_cast<double>(mean[a])).epsilon(1e-14));
    for (std::size_t b = 0; b < rows.n_columns; ++b) {
      long double cross = 0.0L;
      for (std::size_t i = 0; i < n; ++i)
        cross += weight(i) * (rows.columns[a][i] - mean[a]) * (rows.columns[b][i] - mean[b]);
      const double own = std::sqrt(moments.cross[a * (rows.n_columns + 1)] * moments.cross[b * (rows.n_columns + 1)]);
      CHECK(std::abs(moments.cross[a + b * rows.n_columns] - static_cast<double>(cross)) <= tolerance * own);
    }
  }
}

}  // namespace

TEST_CASE("design: packing centres, weights and pads", "[design][property]") {
  test::for_each_instruction_set([] {
    for (const std::size_t n_columns : {1u, 7u, 8u, 19u}) {
      for (const std::size_t n_rows : {1u, 2u, 7u, 8u, 9u, 100u}) {
        for (const bool weighted : {false, true}) {
          const Rows rows = random_rows(n_columns, n_rows, n_columns);
          const std::vector<double> weights = weighted ? rows.weights : std::vector<double>(n_rows, 1.0);
          const Packed packed = pack(rows, weighted ? rows.weights.data() : nullptr, base::sum(weights));
          for (std::size_t c = 0; c < design::padded(n_columns); ++c) {
            long double mean = 0.0L;
            for (std::size_t i = 0; c < n_columns && i < n_rows; ++i)
              mean += static_cast<long double>(weights[i]) * rows.columns[c][i];
            mean /= std::accumulate(weights.begin(), weights.end(), 0.0L);
            CHECK(packed.means[c] == Approx(static_cast<double>(mean)).epsilon(1e-15));
            for (std::size_t i = 0; i < n_rows; ++i) {
              const long double value =
                  c < n_columns ? std::sqrt(static_cast<long double>(weights[i])) * (rows.columns[c][i] - mean) : 0.0L;
              CHECK(packed.at(i, c) == Approx(static_cast<double>(value)).epsilon(1e-15).margin(1e-14));
            }
          }
        }
      }
    }
  });
}

TEST_CASE("design: cross-products are plain sums over the rows, to the bit", "[design][property]") {
  test::for_each_instruction_set([] {
    // without vector registers of its own the kernel has no fused multiplication and addition
    const bool is_fused = base::instruction_set() != "baseline";
    for (const std::size_t n_columns : {1u, 3u, 4u, 5u, 8u, 9u, 12u, 17u, 24u, 31u, 50u}) {
      for (const std::size_t n_rows : {1u, 2u, 7u, 100u, 128u, 129u, 300u}) {
        const Rows rows = random_rows(n_columns, n_rows, n_columns);
        const Packed packed = pack(rows, nullptr, static_cast<double>(n_rows));
        const std::size_t stride = design::padded(n_columns);
        std::vector<double> out(stride * stride, std::numeric_limits<double>::quiet_NaN());
        design::cross_products(packed.panels.data(), n_rows, n_columns, out.data());
        std::size_t n_different = 0;
        for (std::size_t a = 0; a < n_columns; ++a) {
          for (std::size_t b = 0; b <= a; ++b) {
            double sum = 0.0;
            for (std::size_t i = 0; i < n_rows; ++i) {
              const double left = packed.at(i, a);
              const double right = packed.at(i, b);
              sum = is_fused ? std::fma(left, right, sum) : sum + left * right;
            }
            n_different += out[a + b * stride] != sum;
          }
        }
        CHECK(n_different == 0);
      }
    }
  });
}

TEST_CASE("design: moments of a block equal plain loops", "[design][property]") {
  test::for_each_instruction_set([] {
    for (const bool weighted : {false, true}) {
      const Rows rows = random_rows(11, 777, 6);
      check_moments(moments(rows, 0, 777, weighted), rows, weighted, 1e-14);
    }
  });
}

TEST_CASE("design: moments of parts join to those of the whole", "[design][property]") {
  for (const bool weighted : {false, true}) {
    const Rows rows = random_rows(12, 900, 5);
    std::vector<design::Moments> parts;
    for (const auto& [first, last] : {std::pair{0, 1}, {1, 300}, {300, 310}, {310, 850}, {850, 900}})
      parts.push_back(moments(rows, static_cast<std::size_t>(first), static_cast<std::size_t>(last), weighted));
    check_moments(design::join_all(parts), rows, weighted, 1e-14);
  }
}

TEST_CASE("design: joining with no rows changes nothing", "[design][unit]") {
  const Rows rows = random_rows(13, 20, 3);
  const design::Moments all = moments(rows, 0, 20, false);
  design::Moments left = all;
  design::join(left, {});
  CHECK(left.cross == all.cross);
  design::Moments right;
  design::join(right, all);
  CHECK(right.cross == all.cross);
  CHECK(design::join_all({}).weight == 0.0);
}

TEST_CASE("design: moments keep their digits far from zero", "[design][property]") {
  // spread 1 about 10^8: sums of squares about zero would keep none of 16 digits
  Rows rows = random_rows(14, 600, 3);
  for (auto& column : rows.columns)
    for (double& value : column) value = std::round(value * 1024.0) / 1024.0 + 1e8;
  std::vector<design::Moments> parts;
  for (std::size_t first = 0; first < 600; first += 100) parts.push_back(moments(rows, first, first + 100, true));
  check_moments(design::join_all(parts), rows, true, 1e-8);
}

// Cholesky factorisation of dense matrices of a few hundred rows, and what is done with the factor, for the best
// instruction set of the processor.
//
// Why not a library's: it is compiled for what every processor has, which is a quarter to an eighth of what most have.
// One tile of products, Σ_k P(i, k) Q(j, k) for some rows i and kDenseBlock columns j, is all that is fast; Cholesky's
// method from the left, the inverse of the factor (the rows of the identity below the matrix go through the same steps
// and become L⁻ᵀ) and the product of that with its transpose are loops around it. Each entry is a sum over k in its
// order, with a fused multiplication and addition where the processor has one.
#pragma once

#include <Eigen/Core>

#include <cstddef>
#include <vector>

namespace formsieve::proof {

inline constexpr std::size_t kLineLanes = 8;
/// As many numbers as the widest vectors and the cache's lines hold.
struct alignas(kLineLanes * sizeof(double)) Line {
  double at[kLineLanes] = {};
  bool operator==(const Line&) const = default;
};

/// A square matrix by columns; the order is rounded up to whole lines, and what is added is a block of the identity.
/// Columns are an odd number of lines apart, so that a row of many columns does not fall into few sets of the cache.
class PaddedMatrix {
 public:
  /// All zero but for the padding. Allocates only where the order grows.
  void reset(std::size_t order);
  /// The lower triangle of a matrix, and the padding.
  void set_lower(const Eigen::MatrixXd& matrix);

  std::size_t order() const { return order_; }
  std::size_t padded_order() const { return padded_; }
  std::size_t stride() const { return stride_; }
  double* data() { return lines_.data()->at; }
  const double* data() const { return lines_.data()->at; }
  double* column(std::size_t i) { return data() + i * stride_; }
  const double* column(std::size_t i) const { return data() + i * stride_; }
  using Map = Eigen::Map<Eigen::MatrixXd, 0, Eigen::OuterStride<>>;
  using ConstMap = Eigen::Map<const Eigen::MatrixXd, 0, Eigen::OuterStride<>>;
  Map matrix() { return {data(), index(order_), index(order_), Eigen::OuterStride<>(index(stride_))}; }
  ConstMap matrix() const { return {data(), index(order_), index(order_), Eigen::OuterStride<>(index(stride_))}; }

 private:
  static Eigen::Index index(std::size_t i) { return static_cast<Eigen::Index>(i); }
  std::size_t order_ = 0, padded_ = 0, stride_ = 0;
  std::vector<Line> lines_;
};

/// M = LLᵀ from the lower triangle into it; what stands above the diagonal is anything afterwards. False where a pivot
/// is not positive (or not a number). Cost order³ / 6 fused operations.
bool factor_lower(PaddedMatrix& matrix);

/// x ← L⁻¹x and x ← L⁻ᵀx; x holds padded_order() numbers, zero in the padding.
void solve_lower(const PaddedMatrix& lower, double* x);
void solve_transposed(const PaddedMatrix& lower, double* x);

/// The lower triangle of (LLᵀ)⁻¹. `work` becomes L⁻ᵀ. Cost order³ / 3.
void invert_factored(const PaddedMatrix& lower, PaddedMatrix& work, PaddedMatrix& inverse);

}  // namespace formsieve::proof

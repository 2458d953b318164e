#include "survey/medcouple.hpp"

#include <algorithm>
#include <bit>
#include <cmath>
#include <cstddef>
#include <cstdint>
#include <limits>
#include <vector>

#include "survey/order_statistics.hpp"

namespace formsieve::survey {

namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();

/// With a = x − m and b = m − y, h = (1 − ρ)/(1 + ρ) for ρ = b/a. A correctly rounded quotient is monotone in both
/// arguments, which the kernel as written in the paper is not once rounded; hence everything is selected by ρ.
double kernel_of_ratio(double ratio) { return std::isinf(ratio) ? -1.0 : (1.0 - ratio) / (1.0 + ratio); }
double ratio_of_kernel(double kernel) { return (1.0 - kernel) / (1.0 + kernel); }

/// The ratios of all pairs: row i is the i-th largest value at or above the median, column j the j-th largest at or
/// below it. Rising along rows and down columns.
class RatioMatrix {
 public:
  explicit RatioMatrix(std::span<const double> sorted) {
    const double median = quantile(sorted, 0.5);
    // A deviation between values near both ends of the range would overflow; ratios do not feel a common factor.
    const double factor = std::max(std::abs(sorted.front()), std::abs(sorted.back())) > 0x1p1020 ? 0x1p-4 : 1.0;
    for (std::size_t i = sorted.size(); i-- > 0;) {
      if (sorted[i] >= median) above_.push_back(sorted[i] * factor - median * factor);
      if (sorted[i] <= median) below_.push_back(median * factor - sorted[i] * factor);
    }
    n_ties_ = static_cast<std::size_t>(std::count(sorted.begin(), sorted.end(), median));
  }

  std::uint64_t size() const { return std::uint64_t{above_.size()} * below_.size(); }

  /// Entries ≤ `limit`.
  std::uint64_t count_up_to(double limit) const {
    std::uint64_t count = 0;
    for_each_row_end(limit, [&](std::size_t, std::size_t end) { count += end; });
    return count;
  }

  /// Entries in (low, high], in no particular order.
  std::vector<double> between(double low, double high) const {
    std::vector<std::size_t> begin(above_.size(), 0);
    for_each_row_end(low, [&](std::size_t row, std::size_t end) { begin[row] = end; });
    std::vector<double> found;
    for_each_row_end(high, [&](std::size_t row, std::size_t end) {
      for (std::size_t column = begin[row]; column < end; ++column) found.push_back(ratio(row, column));
    });
    return found;
  }

  /// The smallest entry > `limit`; infinity when there is none.
  double next_above(double limit) const {
    double smallest = kInfinity;
    for_each_row_end(limit, [&](std::size_t row, std::size_t end) {
      if (end < below_.size()) smallest = std::min(smallest, ratio(row, end));
    });
    return smallest;
  }

 private:
  double ratio(std::size_t row, std::size_t column) const {
    if (above_[row] != 0.0 || below_[column] != 0.0) return below_[column] / above_[row];
    // Both equal the median. Ties are the last rows and the first columns.
    const std::size_t place = row - (above_.size() - n_ties_) + column + 1;
    return place < n_ties_ ? 0.0 : place == n_ties_ ? 1.0 : kInfinity;
  }

  /// Calls visit(row, number of entries of the row that are ≤ limit) from the first row to the last, walking along the
  /// staircase between the entries on either side of the limit.
  template <class Visit>
  void for_each_row_end(double limit, Visit visit) const {
    std::size_t end = below_.size();
    for (std::size_t row = 0; row < above_.size(); ++row) {
      while (end > 0 && ratio(row, end - 1) > limit) --end;
      visit(row, end);
    }
  }

  std::vector<double> above_;  ///< x − m, falling
  std::vector<double> below_;  ///< m − y, rising
  std::size_t n_ties_ = 0;
};

/// The smallest ratio that has more than `rank` entries at or below it, bracketed: low < it ≤ high.
struct Bracket {
  double low = 0.0, high = kInfinity;
  std::uint64_t n_low = 0, n_high = 0;  ///< entries up to either

  void narrow(const RatioMatrix& matrix, double trial, std::uint64_t rank) {
    const std::uint64_t count = matrix.count_up_to(trial);
    if (count > rank) {
      high = trial;
      n_high = count;
    } else {
      low = trial;
      n_low = count;
    }
  }
};

/// A value strictly between the ends, or `low` when there is none. Halves the kernel's range, over which the entries
/// are spread most evenly; where rounding no longer allows that, the ends' bit patterns, which are ordered like the
/// values because no ratio is negative: so the number of halvings is bounded.
double trial_between(double low, double high) {
  const double by_kernel = ratio_of_kernel((kernel_of_ratio(low) + kernel_of_ratio(high)) / 2.0);
  if (by_kernel > low && by_kernel < high) return by_kernel;
  const auto first = std::bit_cast<std::uint64_t>(low);
  return std::bit_cast<double>(first + (std::bit_cast<std::uint64_t>(high) - first) / 2);
}

/// The entry of rank `rank` (0 = smallest). `enough`: so few entries are listed and selected from.
double select(const RatioMatrix& matrix, std::uint64_t rank, std::uint64_t enough) {
  Bracket bracket;
  bracket.n_low = matrix.count_up_to(0.0);
  bracket.n_high = matrix.size();
  if (bracket.n_low > rank) return 0.0;
  while (bracket.n_high - bracket.n_low > enough) {
    const double trial = trial_between(bracket.low, bracket.high);
    if (trial == bracket.low) return bracket.high;
    bracket.narrow(matrix, trial, rank);
  }
  std::vector<double> left = matrix.between(bracket.low, bracket.high);
  const auto wanted = left.begin() + static_cast<std::ptrdiff_t>(rank - bracket.n_low);
  std::nth_element(left.begin(), wanted, left.end());
  return *wanted;
}

}  // namespace

double medcouple(std::span<const double> sorted) {
  if (sorted.empty()) return 0.0;
  const RatioMatrix matrix(sorted);
  const std::uint64_t lower_rank = (matrix.size() - 1) / 2;
  const std::uint64_t upper_rank = matrix.size() / 2;
  const double lower = select(matrix, lower_rank, 4 * std::uint64_t{sorted.size()});
  const bool same = matrix.size() % 2 == 1 || matrix.count_up_to(lower) > upper_rank;
  const double upper = same ? lower : matrix.next_above(lower);
  return (kernel_of_ratio(lower) + kernel_of_ratio(upper)) / 2.0;
}

}  // namespace formsieve::survey

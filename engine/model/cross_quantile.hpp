// The ends of a CV+ interval, row after row, from the same sorted held-out residuals.
#pragma once

#include <formsieve/model.hpp>

#include <cstddef>
#include <cstdint>
#include <vector>

namespace formsieve::model {

/// The r-th smallest of offset_g + scale·R over all held-out residuals R of all folds g, r = ⌈level·(n + 1)⌉
/// (Barber, Candès, Ramdas & Tibshirani 2021): the upper end of CV+ with the predictions as offsets, the lower end with
/// all signs turned. The folds' predictions lie close together beside the residuals, so each fold's place is only a few
/// steps from where the pooled residuals' own quantile falls in it: those steps are walked, then single residuals are
/// taken in or given up in order until the rank is met. The same value, to the bit, as sorting them all.
class CrossQuantile {
 public:
  CrossQuantile(const std::vector<Fold>& folds, double level);

  bool exists() const { return rank_ <= n_; }  ///< otherwise the interval is the whole line

  /// `offsets` at [g·stride]. exists() holds. Cost O(K·(1 + steps)).
  double at(const double* offsets, std::size_t stride, double sign, double scale) const;

  std::uint64_t n_residuals() const { return n_; }

 private:
  /// Residuals of one fold between two sentinels; `upto[i]` rows have one of the first i, sentinel not counted.
  struct Sorted {
    std::vector<double> values;
    std::vector<std::uint64_t> upto;
    std::size_t start = 0;  ///< values up to the pooled quantile
  };
  std::vector<Sorted> folds_;
  std::uint64_t n_ = 0, rank_ = 0;
  double pooled_ = 0.0;  ///< the r-th smallest residual of all
};

}  // namespace formsieve::model

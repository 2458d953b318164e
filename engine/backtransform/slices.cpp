#include "backtransform/slices.hpp"

namespace formsieve::backtransform {

std::vector<double> slice_means(std::span<const double> sorted, std::size_t n_slices) {
  // In units of 1/n_slices of a value every boundary is a whole number: a slice is n of them, a value n_slices.
  const std::size_t slice = sorted.size();
  std::vector<double> means;
  means.reserve(n_slices);
  std::size_t at = 0;           // the value that is being dealt
  std::size_t left = n_slices;  // what is left of it
  for (std::size_t k = 0; k < n_slices; ++k) {
    long double total = 0.0L;
    for (std::size_t wanted = slice; wanted > 0;) {
      const std::size_t taken = left < wanted ? left : wanted;
      total += static_cast<long double>(taken) * sorted[at];
      wanted -= taken;
      left -= taken;
      if (left == 0) {
        ++at;
        left = n_slices;
      }
    }
    means.push_back(static_cast<double>(total / static_cast<long double>(slice)));
  }
  return means;
}

}  // namespace formsieve::backtransform

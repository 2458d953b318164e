#include "checks/holm.hpp"

#include <algorithm>
#include <numeric>

namespace formsieve::checks {

std::vector<double> holm(std::span<const double> p) {
  std::vector<std::size_t> order(p.size());
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::stable_sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) { return p[a] < p[b]; });
  std::vector<double> adjusted(p.size());
  double so_far = 0.0;
  for (std::size_t i = 0; i < order.size(); ++i) {
    const double stepped = static_cast<double>(order.size() - i) * p[order[i]];
    so_far = std::max(so_far, std::min(1.0, stepped));
    adjusted[order[i]] = so_far;
  }
  return adjusted;
}

}  // namespace formsieve::checks

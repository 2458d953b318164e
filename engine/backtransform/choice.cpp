#include "backtransform/choice.hpp"

#include "backtransform/plain_kind.hpp"
#include "backtransform/words.hpp"
#include "base/sums.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>
#include <vector>

namespace formsieve::backtransform {

namespace {

/// Entries by rising prediction, ties in their order.
std::vector<std::size_t> order_of(std::span<const double> eta) {
  std::vector<std::size_t> order(eta.size());
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::stable_sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) { return eta[a] < eta[b]; });
  return order;
}

/// A mean closer to the uncorrected one than this share is the same to a reader.
constexpr double kSameRel = 1e-9;

}  // namespace

double ThirdsBias::root_mean_square() const {
  return std::sqrt((bias[0] * bias[0] + bias[1] * bias[1] + bias[2] * bias[2]) / 3.0);
}

double ThirdsBias::chi_squared() const {
  double total = 0.0;
  for (std::size_t k = 0; k < 3; ++k) total += std::pow(bias[k] / standard_error[k], 2);
  return total;
}

std::optional<ThirdsBias> bias_by_thirds(const HeldOutMeans& held, std::span<const double> predicted) {
  const std::size_t n = held.measured.size(), entries = held.eta.size();
  if (static_cast<Eigen::Index>(n) < 3 * kSmallestThird) return std::nullopt;
  const auto order = order_of(held.eta);
  ThirdsBias result;
  for (std::size_t k = 0; k < 3; ++k) {
    std::vector<double> error;
    for (std::size_t at = k * entries / 3; at < (k + 1) * entries / 3; ++at)
      error.push_back(predicted[order[at]] - held.measured[order[at] % n]);
    const double rows = static_cast<double>(error.size()) * static_cast<double>(n) / static_cast<double>(entries);
    result.bias[k] = base::mean(error);
    const double variance = base::sum_of_squares(error, result.bias[k]) / (static_cast<double>(error.size()) - 1.0);
    result.standard_error[k] = std::sqrt(variance / rows);
    if (!std::isfinite(result.bias[k])) return std::nullopt;
  }
  return result;
}

Choice choose(bool spread_broken, const HeldOutMeans& held) {
  if (!spread_broken)
    return {
        Method::smearing,
        "Smearing is used: it supposes no distribution of the residuals, and their spread is not so unequal that it "
        "would need more than one factor."};
  const auto smeared = bias_by_thirds(held, held.smeared), by_thirds = bias_by_thirds(held, held.by_thirds);
  if (!smeared || !by_thirds)
    return {
        Method::smearing,
        "Smearing is used although the spread is unequal: smearing by thirds of the predictions cannot be judged on "
        "these rows."};
  const double before = smeared->root_mean_square(), after = by_thirds->root_mean_square();
  const std::string figures =
      "from " + number_words(before) + " to " + number_words(after) + " (root mean square of the three, own units)";
  if (smeared->chi_squared() <= kBiasBeyondChance)
    return {Method::smearing,
            "Smearing is used although the spread is unequal: the held-out bias that it leaves within thirds of the "
            "predictions is within chance."};
  if (!(after <= kLeftByThirds * before))
    return {Method::smearing,
            "Smearing is used although the spread is unequal: factors by thirds of the predictions would bring the "
            "held-out bias within those thirds " +
                figures + ", which does not pay for three factors."};
  return {Method::thirds,
          "Smearing by thirds is used: the spread is unequal, and it brings the held-out bias within thirds of the "
          "predictions, which is beyond chance, " +
              figures + "."};
}

Choice choice_of_identity() {
  return {Method::smearing, "The response enters as it is, so that nothing has to be transformed back."};
}

std::string mean_median_words(const forms::Form& response, double mean, double uncorrected) {
  if (plain_kind(response) == forms::Kind::identity)
    return "The response enters as it is: where residuals are symmetric, its mean and its median are the same.";
  if (!std::isfinite(mean) || !std::isfinite(uncorrected))
    return "The uncorrected prediction is a median where residuals are symmetric; on these rows it cannot be compared "
           "with the mean, since one of them is undefined.";
  const double difference = uncorrected - mean;
  if (std::abs(difference) <= kSameRel * std::abs(mean))
    return "The uncorrected prediction is a median where residuals are symmetric; on these rows it equals the mean.";
  const std::string size = mean == 0.0 ? number_words(std::abs(difference)) + " in own units"
                                       : percent_words(std::abs(difference / mean)) + " (" +
                                             number_words(std::abs(difference)) + " in own units)";
  return "The uncorrected prediction is a median, where residuals are symmetric: on these rows it is " + size +
         (difference < 0.0 ? " below" : " above") + " the mean on average.";
}

}  // namespace formsieve::backtransform

#include "search/standings.hpp"

#include <algorithm>
#include <bit>
#include <cmath>

namespace formsieve::search {

namespace {
/// The first bin's octave relative to the unit, and bins to an octave; the kernel counts alike.
constexpr int kFirstOctave = -14;
constexpr std::size_t kBinsToOctave = 4;
/// All bits of the fraction but the first two.
constexpr int kLowBits = 50;
constexpr int kExponentBias = 1023;
}  // namespace

double Summary::edge(std::size_t i) {
  const double fraction = 1.0 + static_cast<double>(i % kBinsToOctave) / kBinsToOctave;
  return std::ldexp(fraction, kFirstOctave + static_cast<int>(i / kBinsToOctave));
}

int unit_exponent(double empty_cv_sse) {
  return empty_cv_sse > 0.0 ? static_cast<int>(std::ceil(std::log2(empty_cv_sse))) : 0;
}

std::int64_t first_bin(int exponent) {
  return (kExponentBias + exponent + kFirstOctave) * static_cast<std::int64_t>(kBinsToOctave);
}

std::size_t histogram_bin(double cv_sse, std::int64_t first) {
  const auto bin = static_cast<std::int64_t>(std::bit_cast<std::uint64_t>(cv_sse) >> kLowBits) - first;
  return static_cast<std::size_t>(std::clamp<std::int64_t>(bin, 0, Summary::kBins - 1));
}

void LogSum::add(double log_term) {
  if (log_term == -std::numeric_limits<double>::infinity()) return;
  if (log_term > largest_) {
    sum_ = sum_ * std::exp(largest_ - log_term) + 1.0;
    largest_ = log_term;
  } else {
    sum_ += std::exp(log_term - largest_);
  }
}

double LogSum::value() const {
  return sum_ == 0.0 ? -std::numeric_limits<double>::infinity() : largest_ + std::log(sum_);
}

StandingCells::StandingCells(const Space& space) : first{0} {
  for (const auto& predictor : space.predictors) first.push_back(first.back() + 1 + predictor.forms.size());
  n = first.back() + space.predictors.size() + 2;
}

BestStandings::BestStandings(const StandingCells& cells, std::size_t n_responses)
    : histogram(n_responses * Summary::kBins, 0) {
  for (auto& values : best) values.assign(n_responses * cells.n, std::numeric_limits<double>::infinity());
}

void BestStandings::lower(std::size_t at, const double (&figures)[2]) {
  for (int x = 0; x < 2; ++x) best[x][at] = std::min(best[x][at], figures[x]);
}

void BestStandings::lower(const BestStandings& other) {
  for (int x = 0; x < 2; ++x)
    for (std::size_t i = 0; i < best[x].size(); ++i) best[x][i] = std::min(best[x][i], other.best[x][i]);
  for (std::size_t i = 0; i < histogram.size(); ++i) histogram[i] += other.histogram[i];
}

namespace {

/// ln(e^all − Σ e^parts), −∞ where nothing is left.
double log_rest(double all, std::span<const double> parts) {
  double rest = 1.0;
  for (const double part : parts) rest -= std::exp(part - all);
  return rest > 0.0 ? all + std::log(rest) : -std::numeric_limits<double>::infinity();
}

}  // namespace

std::vector<ResponseSummary> summarise(const Space& space, const StandingCells& cells, const BestStandings& best,
                                       std::span<const WeightLogs> weights, std::span<const double> scale,
                                       std::size_t n_rows) {
  std::vector<ResponseSummary> result;
  for (std::size_t r = 0; r < scale.size(); ++r) {
    const double unit = scale[r] * scale[r];
    const double log_unit = -0.5 * static_cast<double>(n_rows) * std::log(unit);
    const auto standing = [&](std::size_t cell) {
      LogSum weight;
      for (const WeightLogs& part : weights)
        if (!part.empty()) weight.add(part[r * cells.n + cell]);
      return Standing{best.best[0][r * cells.n + cell] * unit, best.best[1][r * cells.n + cell] * unit,
                      weight.value() + log_unit};
    };
    ResponseSummary& summary = result.emplace_back();
    summary.all = standing(cells.all());
    for (std::size_t j = 0; j < space.predictors.size(); ++j) {
      auto& choices = summary.of_choice.emplace_back();
      std::vector<double> present;
      for (std::size_t c = 0; c <= space.predictors[j].forms.size(); ++c) {
        choices.push_back(standing(cells.choice(j, c)));
        if (c > 0) present.push_back(choices.back().log_weight);
      }
      // what lacks the predictor is what the walk does not sum: the rest
      choices[0].log_weight = space.predictors[j].always ? -std::numeric_limits<double>::infinity()
                                                         : log_rest(summary.all.log_weight, present);
    }
    for (std::size_t k = 0; k <= space.predictors.size(); ++k) summary.by_terms.push_back(standing(cells.terms(k)));
    const auto counts = best.histogram.begin() + static_cast<std::ptrdiff_t>(r * Summary::kBins);
    summary.histogram.assign(counts, counts + Summary::kBins);
  }
  return result;
}

}  // namespace formsieve::search

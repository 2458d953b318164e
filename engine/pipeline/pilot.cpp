#include "pipeline/pilot.hpp"

#include "base/parallel.hpp"
#include "base/sums.hpp"
#include "backtransform/backtransform.hpp"
#include "fit/folded_fit.hpp"
#include "search/descend.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>
#include <utility>

namespace formsieve::pipeline {

namespace {

using Eigen::Index;

/// The step of the central difference as a share of the residuals' root mean square, over which H is smooth: its error,
/// of the order of the square, is far below what a first-order score can see, and so are the roundings of H. Where the
/// fit is exact the step is a share of the response's spread.
constexpr double kStep_rel = 1e-3;
constexpr double kLeastStep_rel = 1e-6;

/// Coefficients of one candidate.
struct Refits {
  std::vector<std::vector<Eigen::VectorXd>> without;  ///< [repeats][folds]
  Eigen::VectorXd all;
};

std::vector<std::size_t> all_rows(const Prepared& prepared) {
  std::vector<std::size_t> rows(prepared.data.n_rows);
  std::iota(rows.begin(), rows.end(), std::size_t{0});
  return rows;
}

Eigen::VectorXd weights_of(const Prepared& prepared) {
  const auto& weights = prepared.data.weights;
  return Eigen::Map<const Eigen::VectorXd>(weights.data(), static_cast<Index>(weights.size()));
}

/// Nothing when the candidate cannot be fitted in some fold.
std::optional<Refits> refit(const Prepared& prepared, const search::Choice& choice, const Eigen::VectorXd& z) {
  const Eigen::MatrixXd x = design::design_matrix(prepared.data, choice.choice, all_rows(prepared));
  const Eigen::VectorXd weights = weights_of(prepared);
  const auto& folds = prepared.folds;
  Refits refits;
  for (std::size_t repeat = 0; repeat < folds.repeats; ++repeat) {
    const fit::FoldedFit folded(x, z, weights, folds.fold_of[repeat], folds.count);
    auto& without = refits.without.emplace_back();
    for (std::size_t fold = 0; fold < folds.count; ++fold) {
      auto solution = folded.without(fold);
      if (!solution) return std::nullopt;
      without.push_back(std::move(solution->coefficients));
    }
    if (repeat > 0) continue;
    auto solution = folded.all();
    if (!solution) return std::nullopt;
    refits.all = std::move(solution->coefficients);
  }
  return refits;
}

double median(std::vector<double>& values) {
  const auto middle = values.begin() + static_cast<std::ptrdiff_t>(values.size() / 2);
  std::nth_element(values.begin(), middle, values.end());
  if (values.size() % 2 == 1) return *middle;
  return 0.5 * (*std::max_element(values.begin(), middle) + *middle);
}

/// Medians over the candidates, on the form's scale.
struct Medians {
  std::vector<std::vector<double>> held_out;  ///< [repeats][n_rows]
  Eigen::VectorXd fitted;                     ///< [n_rows] fits on all rows
};

/// The good candidates of one response form and their refits.
struct Good {
  std::vector<search::Choice> choices;
  std::vector<Refits> refits;
};

Good good_candidates(const Prepared& prepared, const base::GramSet& grams, std::size_t response,
                     const Eigen::VectorXd& z, std::span<const search::Choice> candidates, unsigned threads) {
  std::vector<search::Choice> found(candidates.begin(),
                                    candidates.begin() + std::min(candidates.size(), kPilotCandidates));
  if (found.empty()) {
    search::DescentOptions options;
    options.keep = kPilotCandidates;
    options.threads = threads;
    found = search::descend(prepared.space, grams, response, options);
  }
  std::vector<std::optional<Refits>> refits(found.size());
  base::parallel_for(found.size(), threads, [&](std::size_t m) { refits[m] = refit(prepared, found[m], z); });
  Good good;
  for (std::size_t m = 0; m < found.size(); ++m) {
    if (!refits[m]) continue;
    good.choices.push_back(found[m]);
    good.refits.push_back(std::move(*refits[m]));
  }
  return good;
}

/// Medians on the rows [first, last).
void take_medians(const Prepared& prepared, const Good& good, std::size_t first, std::size_t last, Medians& medians) {
  std::vector<std::size_t> rows(last - first);
  std::iota(rows.begin(), rows.end(), first);
  const std::size_t repeats = prepared.folds.repeats;
  std::vector<std::vector<double>> predictions((repeats + 1) * rows.size());  // [repeat, then all rows][row][candidate]
  for (std::size_t m = 0; m < good.choices.size(); ++m) {
    const Eigen::MatrixXd x = design::design_matrix(prepared.data, good.choices[m].choice, rows);
    for (std::size_t i = 0; i < rows.size(); ++i) {
      const auto row = x.row(static_cast<Index>(i));
      for (std::size_t repeat = 0; repeat < repeats; ++repeat) {
        const std::uint32_t fold = prepared.folds.fold_of[repeat][rows[i]];
        predictions[repeat * rows.size() + i].push_back(row.dot(good.refits[m].without[repeat][fold]));
      }
      predictions[repeats * rows.size() + i].push_back(row.dot(good.refits[m].all));
    }
  }
  for (std::size_t i = 0; i < rows.size(); ++i) {
    for (std::size_t repeat = 0; repeat < repeats; ++repeat)
      medians.held_out[repeat][rows[i]] = median(predictions[repeat * rows.size() + i]);
    medians.fitted[static_cast<Index>(rows[i])] = median(predictions[repeats * rows.size() + i]);
  }
}

Medians medians_of(const Prepared& prepared, const Good& good, unsigned threads) {
  const std::size_t n = prepared.data.n_rows;
  Medians medians{std::vector<std::vector<double>>(prepared.folds.repeats, std::vector<double>(n)),
                  Eigen::VectorXd(static_cast<Index>(n))};
  base::parallel_for((n + base::kRowChunk - 1) / base::kRowChunk, threads, [&](std::size_t chunk) {
    const std::size_t first = chunk * base::kRowChunk;
    take_medians(prepared, good, first, std::min(first + base::kRowChunk, n), medians);
  });
  return medians;
}

/// p, H(p) and H′(p) of one row.
struct Tangent {
  double at = 0.0, mean = 0.0, slope = 0.0;
};

bool exists(const Tangent& tangent) {
  return std::isfinite(tangent.at) && std::isfinite(tangent.mean) && std::isfinite(tangent.slope) &&
         tangent.slope != 0.0;
}

double median_slope(const std::vector<Tangent>& tangents) {
  std::vector<double> slopes;
  for (const Tangent& tangent : tangents)
    if (exists(tangent)) slopes.push_back(std::abs(tangent.slope));
  return slopes.empty() ? 0.0 : median(slopes);
}

/// Gives rows without a usable tangent that of their nearest neighbour by p. False when no row has one.
bool mend(std::vector<Tangent>& tangents) {
  const double typical = median_slope(tangents);
  const auto usable = [&](const Tangent& tangent) {
    const double size = std::abs(tangent.slope);
    return exists(tangent) && size <= typical * kSlopeRange && size * kSlopeRange >= typical;
  };
  std::vector<Tangent> good;
  for (const Tangent& tangent : tangents)
    if (usable(tangent)) good.push_back(tangent);
  if (good.empty()) return false;
  std::stable_sort(good.begin(), good.end(), [](const Tangent& a, const Tangent& b) { return a.at < b.at; });
  for (Tangent& tangent : tangents) {
    if (usable(tangent)) continue;
    const auto above = std::lower_bound(good.begin(), good.end(), tangent.at,
                                        [](const Tangent& some, double at) { return some.at < at; });
    if (above == good.begin() || (above != good.end() && above->at - tangent.at < tangent.at - (above - 1)->at))
      tangent = *above;
    else
      tangent = *(above - 1);
  }
  return true;
}

std::vector<Tangent> tangents_at(const std::vector<double>& predictions, const std::vector<double>& weights,
                                 const backtransform::Smearing& smearing, double step, unsigned threads) {
  const std::size_t n = predictions.size();
  std::vector<Tangent> tangents(n);
  base::parallel_for((n + base::kRowChunk - 1) / base::kRowChunk, threads, [&](std::size_t chunk) {
    for (std::size_t i = chunk * base::kRowChunk; i < std::min((chunk + 1) * base::kRowChunk, n); ++i) {
      const double weight = weights.empty() ? 1.0 : weights[i];
      const double at = predictions[i];
      tangents[i] = {at, smearing.mean(at, weight),
                     (smearing.mean(at + step, weight) - smearing.mean(at - step, weight)) / (2.0 * step)};
    }
  });
  return tangents;
}

}  // namespace

bool is_linear(const forms::Form& response) { return forms::equivalent(response, forms::Form{}); }

std::optional<design::Pilot> make_pilot(const Prepared& prepared, const base::GramSet& grams, std::size_t response,
                                        unsigned threads, std::span<const search::Choice> candidates) {
  const Eigen::VectorXd z = design::response_vector(prepared.data, response, all_rows(prepared));
  const Good good = good_candidates(prepared, grams, response, z, candidates, threads);
  if (good.choices.empty()) return std::nullopt;
  const Medians medians = medians_of(prepared, good, threads);
  const Eigen::VectorXd residuals = z - medians.fitted;
  const backtransform::Smearing smearing(prepared.data.response_forms[response], residuals, weights_of(prepared));
  const double rms = residuals.stableNorm() / std::sqrt(static_cast<double>(residuals.size()));
  const double step = std::max(kStep_rel * rms, kLeastStep_rel * grams.response_scale[response]);

  design::Pilot pilot;
  pilot.response = response;
  for (const auto& predictions : medians.held_out) {
    auto tangents = tangents_at(predictions, prepared.data.weights, smearing, step, threads);
    if (!mend(tangents)) return std::nullopt;
    auto& slope = pilot.slope.emplace_back();
    auto& working = pilot.working.emplace_back();
    for (std::size_t i = 0; i < tangents.size(); ++i) {
      slope.push_back(tangents[i].slope);
      working.push_back(tangents[i].at + (prepared.data.response[i] - tangents[i].mean) / tangents[i].slope);
    }
  }
  return pilot;
}

Status add_own_units(const Prepared& prepared, base::GramSet& grams, unsigned threads,
                     std::span<const std::vector<search::Choice>> candidates) {
  std::vector<design::Pilot> pilots;
  for (std::size_t r = 0; r < prepared.data.response_forms.size(); ++r) {
    if (is_linear(prepared.data.response_forms[r])) continue;
    const auto known =
        r < candidates.size() ? std::span<const search::Choice>(candidates[r]) : std::span<const search::Choice>();
    if (!candidates.empty() && known.empty() && grams.n_columns > kMostDescendedColumns) continue;
    if (auto pilot = make_pilot(prepared, grams, r, threads, known)) pilots.push_back(std::move(*pilot));
  }
  auto own = design::build_own_units_grams(prepared.data, prepared.folds, pilots, threads);
  if (!own) return own.error();
  grams.own_units = std::move(*own);
  return {};
}

}  // namespace formsieve::pipeline

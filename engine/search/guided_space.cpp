#include "search/guided_space.hpp"

#include "base/random.hpp"
#include "search/guided_kernel.hpp"
#include "search/own_score.hpp"

#include <algorithm>
#include <limits>

namespace formsieve::search {

namespace {

/// Any fixed number: the keys only spread candidates over hashes.
constexpr std::uint64_t kKeySeed = 1;
/// Two ways to the same sum differ by about 1e-16 over the smallest pivot share (kSmallestPivot_rel), at worst; by this
/// on ordinary data. Below it a descent would follow noise.
constexpr double kRounding_rel = 1e-13;

}  // namespace

GuidedSpace::GuidedSpace(const Space& space) : space_(space), first_form_{0} {
  base::SplitMix64 random(kKeySeed);
  for (std::size_t r = 0; r < space.n_responses; ++r) response_key_.push_back(random.next());
  for (std::size_t j = 0; j < space.predictors.size(); ++j) {
    const PredictorChoices& predictor = space.predictors[j];
    for (std::size_t f = 0; f < predictor.forms.size(); ++f)
      forms_.push_back({j, static_cast<std::uint16_t>(f + 1), predictor.forms[f].first_column,
                        predictor.forms[f].n_columns, random.next()});
    first_form_.push_back(forms_.size());
    if (predictor.always) ++n_always_;
    if (predictor.always && predictor.forms.empty()) any_ = false;
  }
  most_terms_ = std::min(space.max_terms.value_or(space.predictors.size()), space.predictors.size());
  if (most_terms_ < n_always_) any_ = false;
}

std::uint64_t GuidedSpace::hash(std::size_t response, const Choices& choices) const {
  std::uint64_t hash = response_key_[response];
  for (std::size_t j = 0; j < choices.size(); ++j)
    if (choices[j] != 0) hash ^= form(j, choices[j]).key;
  return hash;
}

Objective::Objective(const base::GramSet& grams, std::size_t response, const base::GramSet::OwnUnits* own)
    : grams_(grams), response_(response), own_(own), width_((grams.n_columns + kRowGrain - 1) / kRowGrain * kRowGrain) {
  const double scale = grams.response_scale[response];
  unit_ = own == nullptr ? scale * scale : own->sse_factor;
  double total = 0.0;
  for (std::size_t f = 0; f < grams.n_folds; ++f) {
    const ObjectiveFold fold = matrices(f);
    rows_.push_back(rows(fold));
    total += fold.v_yy;
  }
  rounding_ = std::max(total, 0.0) * unit_ * kRounding_rel;
}

/// The fold without its rows.
ObjectiveFold Objective::matrices(std::size_t f) const {
  ObjectiveFold fold{};
  fold.a = grams_.training[f].data();
  fold.a_order = grams_.order();
  fold.v = own_ == nullptr ? grams_.validation[f].data() : own_->validation[f].data();
  fold.v_order = own_ == nullptr ? grams_.order() : grams_.n_columns + 2;
  const auto v = [&](std::size_t i, std::size_t j) { return fold.v[i + j * fold.v_order]; };
  const std::size_t y = grams_.n_columns + (own_ == nullptr ? response_ : 0);
  fold.v_yy = v(y, y);
  if (own_ != nullptr) fold.v_yy += 2.0 * v(y, y + 1) + v(y + 1, y + 1);
  return fold;
}

std::vector<double> Objective::rows(const ObjectiveFold& fold) const {
  std::vector<double> rows(5 * width_, 0.0);
  const double* const a_y = fold.a + (grams_.n_columns + response_) * fold.a_order;
  const double* const v_y = fold.v + (grams_.n_columns + (own_ == nullptr ? response_ : 0)) * fold.v_order;
  for (std::size_t c = 0; c < grams_.n_columns; ++c) {
    rows[c] = fold.a[c + c * fold.a_order];
    rows[width_ + c] = fold.v[c + c * fold.v_order];
    rows[2 * width_ + c] = a_y[c];
    rows[3 * width_ + c] = own_ == nullptr ? v_y[c] : v_y[c] + v_y[c + fold.v_order];  // the shift's column is next
    rows[4 * width_ + c] = kSmallestPivot_rel * rows[c];
  }
  return rows;
}

ObjectiveFold Objective::fold(std::size_t f) const {
  ObjectiveFold fold = matrices(f);
  const double* const rows = rows_[f].data();
  fold.a_diagonal = rows;
  fold.v_diagonal = rows + width_;
  fold.a_y = rows + 2 * width_;
  fold.v_y = rows + 3 * width_;
  fold.least = rows + 4 * width_;
  return fold;
}

double Objective::score(const GuidedSpace& space, const Choices& choices, CandidateFit& fit) const {
  std::vector<std::size_t> columns;
  columns_of(space.space(), choices, columns);
  if (own_ == nullptr) return cv_sse_of(grams_, columns, response_, fit) * unit_;
  if (!fit.solve(grams_.all, grams_.order(), columns, grams_.n_columns + response_))
    return std::numeric_limits<double>::infinity();
  const Choice choice{response_, choices};
  return own_scores(space.space(), grams_, std::span(&choice, 1), 1).front().working_response;
}

}  // namespace formsieve::search

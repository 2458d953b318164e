#include "backtransform/effects.hpp"

#include "backtransform/intervals.hpp"
#include "backtransform/plain_kind.hpp"
#include "backtransform/words.hpp"

#include <boost/math/distributions/students_t.hpp>

#include <cmath>
#include <numbers>
#include <optional>
#include <utility>

namespace formsieve::backtransform {

namespace {

using Eigen::Index;

/// 10 % more.
constexpr double kMore = 1.1;

bool is_text(const EffectTerm& term) { return term.form.kind == forms::Kind::levels; }

/// What evaluate() takes for a level.
double code_of(const forms::Form& form, const std::string& level) {
  return static_cast<double>(forms::level_code(form, level).value_or(0));
}

double typical(const EffectTerm& term) { return is_text(term) ? code_of(term.form, term.most_frequent) : term.median; }

void set_columns(Eigen::VectorXd& x, Index first, const forms::Form& form, double value) {
  forms::evaluate(form, value, {x.data() + first, forms::n_columns(form)});
}

/// Logarithm of the column as it is, neither reflected nor shifted.
bool is_plain_logarithm(const forms::Form& form) { return is_logarithm(form) && !form.reflect && form.shift == 0.0; }

double units_of_ln(const forms::Form& form) {
  return plain_kind(form) == forms::Kind::log10 ? std::numbers::ln10 : 1.0;
}

/// The effects of one fit, term by term.
class Teller {
 public:
  explicit Teller(const EffectSubject& subject) : subject_(subject), typical_(subject.coefficients.size()) {
    typical_[0] = 1.0;
    Index first = 1;
    for (const auto& term : subject.terms) {
      set_columns(typical_, first, term.form, typical(term));
      first += static_cast<Index>(forms::n_columns(term.form));
    }
    if (subject.df > 0.0)
      quantile_ = boost::math::quantile(boost::math::students_t(subject.df), 0.5 * (1.0 + kIntervalLevel));
  }

  std::vector<Effect> all() const {
    std::vector<Effect> told;
    Index first = 1;
    for (const auto& term : subject_.terms) {
      tell(term, first, told);
      first += static_cast<Index>(forms::n_columns(term.form));
    }
    return told;
  }

 private:
  void tell(const EffectTerm& term, Index first, std::vector<Effect>& told) const;
  Effect started(const EffectTerm& term, Index first, std::string kind) const;
  Effect elasticity(const EffectTerm& term, Index first) const;
  Effect difference(const EffectTerm& term, Index first) const;
  Effect level(const EffectTerm& term, Index first, std::size_t code) const;
  void compare(Effect& effect, const EffectTerm& term, Index first, double from, double to) const;
  std::string interval_words(const Effect& effect, const std::string& unit) const;
  std::string change_words(const Effect& effect) const;

  const EffectSubject& subject_;
  Eigen::VectorXd typical_;  ///< [p] the row with every predictor at its median or most frequent level
  std::optional<double> quantile_;
};

void Teller::tell(const EffectTerm& term, Index first, std::vector<Effect>& told) const {
  if (is_text(term)) {
    for (std::size_t code = 0; code < term.form.levels.size(); ++code)
      if (static_cast<double>(code) != typical(term)) told.push_back(level(term, first, code));
  } else if (is_plain_logarithm(subject_.response) && is_plain_logarithm(term.form)) {
    told.push_back(elasticity(term, first));
  } else {
    told.push_back(difference(term, first));
  }
}

Effect Teller::started(const EffectTerm& term, Index first, std::string kind) const {
  Effect effect;
  effect.column = term.column;
  effect.kind = std::move(kind);
  if (!is_text(term))
    effect.direction = direction_words(
        term.form, subject_.coefficients.segment(first, static_cast<Index>(forms::n_columns(term.form))), term.min,
        term.max, forms::monotone_sign(subject_.response));
  if (term.declared != 0) effect.declared = term.declared > 0 ? "rising" : "falling";
  return effect;
}

/// ", rising over the seen range as declared".
std::string direction_clause(const Effect& effect) {
  if (effect.direction.empty()) return {};
  std::string words = "; " + effect.direction + " over the seen range";
  if (effect.direction == effect.declared) return words + ", as declared";
  return effect.declared.empty() ? words : words + ", declared " + effect.declared;
}

Effect Teller::elasticity(const EffectTerm& term, Index first) const {
  Effect effect = started(term, first, "elasticity");
  effect.from = term.median;
  effect.to = kMore * term.median;
  const double unit = units_of_ln(subject_.response) / units_of_ln(term.form);
  const double slope = subject_.coefficients[first];
  const auto percent = [&](double beta) { return 100.0 * std::expm1(beta * unit * std::log(kMore)); };
  effect.change = percent(slope);
  if (quantile_) {
    const double reach = *quantile_ * std::sqrt(subject_.covariance(first, first));
    effect.low = percent(slope - reach);
    effect.high = percent(slope + reach);
  }
  effect.words = "10 % more " + term.column + " goes with " + number_words(std::abs(*effect.change)) +
                 (*effect.change < 0.0 ? " % less " : " % more ") + subject_.response_column +
                 interval_words(effect, " %") + direction_clause(effect) + ".";
  return effect;
}

/// Mean predictions with one term at two values, their difference, and its interval by the delta method.
void Teller::compare(Effect& effect, const EffectTerm& term, Index first, double from, double to) const {
  Eigen::VectorXd at_from = typical_, at_to = typical_;
  set_columns(at_from, first, term.form, from);
  set_columns(at_to, first, term.form, to);
  const NewRow row_from{at_from.dot(subject_.coefficients)}, row_to{at_to.dot(subject_.coefficients)};
  const double mean_from = subject_.correction.mean(row_from), mean_to = subject_.correction.mean(row_to);
  if (std::isfinite(mean_from)) effect.at_from = mean_from;
  if (std::isfinite(mean_to)) effect.at_to = mean_to;
  if (!effect.at_from || !effect.at_to) return;
  effect.change = mean_to - mean_from;
  const Eigen::VectorXd gradient =
      subject_.correction.slope(row_to) * at_to - subject_.correction.slope(row_from) * at_from;
  const double variance = gradient.dot(subject_.covariance * gradient);
  if (!quantile_ || !std::isfinite(variance)) return;
  const double reach = *quantile_ * std::sqrt(std::max(variance, 0.0));
  effect.low = *effect.change - reach;
  effect.high = *effect.change + reach;
}

Effect Teller::difference(const EffectTerm& term, Index first) const {
  const bool quartiles = term.q1 < term.q3;
  Effect effect = started(term, first, quartiles ? "quartiles" : "range");
  effect.from = quartiles ? term.q1 : term.min;
  effect.to = quartiles ? term.q3 : term.max;
  compare(effect, term, first, effect.from, effect.to);
  const auto [from, to] = pair_words(effect.from, effect.to);
  effect.words = term.column + " at " + to + " rather than " + from +
                 (quartiles ? " (upper and lower quartile) " : " (largest and smallest value) ") +
                 change_words(effect) + direction_clause(effect) + ".";
  return effect;
}

Effect Teller::level(const EffectTerm& term, Index first, std::size_t code) const {
  Effect effect = started(term, first, "levels");
  const auto reference = static_cast<std::size_t>(typical(term));
  effect.from_level = term.form.levels[reference];
  effect.to_level = term.form.levels[code];
  compare(effect, term, first, static_cast<double>(reference), static_cast<double>(code));
  effect.words = term.column + " = " + effect.to_level + " rather than " + effect.from_level + " (the most frequent) " +
                 change_words(effect) + ".";
  return effect;
}

/// " (95 % interval 7.9 to 8.7 %)".
std::string Teller::interval_words(const Effect& effect, const std::string& unit) const {
  if (!effect.low || !effect.high) return {};
  const auto [low, high] = range_words(*effect.low, *effect.high);
  return " (95 % interval " + low + " to " + high + unit + ")";
}

std::string Teller::change_words(const Effect& effect) const {
  if (!effect.change) return "cannot be compared, since a mean is undefined there";
  const auto [from, to] = pair_words(*effect.at_from, *effect.at_to);
  std::string words = "goes with " + number_words(std::abs(*effect.change)) +
                      (*effect.change < 0.0 ? " less " : " more ") + subject_.response_column + ", " + to +
                      " against " + from;
  if (!effect.low || !effect.high) return words;
  const auto [low, high] = range_words(*effect.low, *effect.high);
  return words + " (95 % interval of the difference " + low + " to " + high + ")";
}

}  // namespace

std::vector<Effect> effects(const EffectSubject& subject) { return Teller(subject).all(); }

}  // namespace formsieve::backtransform

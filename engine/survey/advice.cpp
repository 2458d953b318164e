#include "survey/advice.hpp"

#include <cmath>

#include "survey/box_cox.hpp"
#include "survey/words.hpp"

namespace formsieve::survey {

namespace {

/// Log rule: values over more than one order of magnitude (Weisberg).
constexpr double kWideRange = 10.0;
/// Range rule: "considerably less than one order of magnitude" (Weisberg), read as a factor of 3, half an order.
constexpr double kNarrowRange = 3.0;
/// Medcouple below which the middle of the column counts as symmetric: a judgement.
constexpr double kSymmetricMedcouple = 0.05;
/// Share of missing values worth a sentence, since a candidate's rows are complete rows: a judgement.
constexpr double kManyMissing = 0.1;
/// Ratios beyond it are told as orders of magnitude.
constexpr double kLargestTold = 1e6;

std::string ratio_text(double smallest, double largest) {
  const double orders = std::log10(largest) - std::log10(smallest);
  if (orders >= std::log10(kLargestTold)) return "10^" + std::to_string(std::lround(orders));
  return rounded(largest / smallest, largest / smallest < kWideRange ? 2 : 0);
}

/// Where the log rule and the skewness disagree.
std::string against_log(const ColumnProfile& profile) {
  for (const FormTrial& trial : profile.forms) {
    const bool plain_ln = trial.form.kind == forms::Kind::ln && !trial.form.reflect && trial.form.shift == 0.0;
    if (!plain_ln || !trial.skewness_after) continue;
    if (std::abs(*trial.skewness_after) <= std::abs(profile.facts.skewness)) return "";
    return "; here, though, ln would make it more skewed (skewness " + rounded(*trial.skewness_after, 2) + ", from " +
           rounded(profile.facts.skewness, 2) + ")";
  }
  return "";
}

void add_range_rules(const ColumnProfile& profile, std::vector<std::string>& notes) {
  const forms::ColumnFacts& facts = profile.facts;
  if (facts.min <= 0.0) return;
  const double orders = std::log10(facts.max) - std::log10(facts.min);
  const std::string ratio = "its largest value is " + ratio_text(facts.min, facts.max) + " times its smallest";
  if (orders > std::log10(kWideRange)) {
    notes.push_back(ratio + ", beyond 10: ln is likely to help (log rule, Weisberg; advice, not a filter)" +
                    against_log(profile));
  } else if (orders < std::log10(kNarrowRange)) {
    notes.push_back(ratio +
                    ", well under one order of magnitude: no transformation is likely to matter much (range rule, "
                    "Weisberg; the limit of 3 is ours; advice, not a filter)");
  }
}

void add_fragile_skewness(const ColumnProfile& profile, std::vector<std::string>& notes) {
  const bool skewed = profile.skew == forms::SkewClass::moderate || profile.skew == forms::SkewClass::severe;
  const double along = std::copysign(1.0, profile.facts.skewness) * profile.medcouple;
  if (!skewed || along >= kSymmetricMedcouple) return;
  notes.push_back("the skewness rests on few rows: the medcouple, which they cannot move, is " +
                  rounded(profile.medcouple, 3) + " (look at the outlying values before choosing a form; a judgement)");
}

void add_missing(const ColumnProfile& profile, std::vector<std::string>& notes) {
  const double n_rows = static_cast<double>(profile.facts.n + profile.n_missing);
  if (static_cast<double>(profile.n_missing) <= kManyMissing * n_rows) return;
  notes.push_back("it is missing on " + std::to_string(profile.n_missing) + " of " +
                  std::to_string(profile.facts.n + profile.n_missing) +
                  " rows, which a search that uses it must leave out");
}

}  // namespace

std::vector<std::string> advice(const ColumnProfile& profile, bool outlying_by_mean_deviation) {
  std::vector<std::string> notes;
  const forms::ColumnFacts& facts = profile.facts;
  if (facts.n < 3)
    notes.push_back("it has too few values for a skewness, which needs three (shown as 0)");
  else if (facts.n < 4)
    notes.push_back("it has too few values for an excess kurtosis, which needs four (shown as 0)");
  add_range_rules(profile, notes);
  add_fragile_skewness(profile, notes);
  if (outlying_by_mean_deviation)
    notes.push_back(
        "more than half of its values are equal, so their median absolute deviation is 0; outlying values are judged "
        "by the mean absolute deviation instead (common practice)");
  if (profile.box_cox_lambda == kLowestLambda || profile.box_cox_lambda == kHighestLambda)
    notes.push_back("the Box–Cox power of the column by itself lies at or beyond " + readable(*profile.box_cox_lambda) +
                    ", the end of the range looked at");
  add_missing(profile, notes);
  return notes;
}

}  // namespace formsieve::survey

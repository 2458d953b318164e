// Room backtransform, result types: what going back to own units costs. May call: base.
#pragma once

#include <optional>
#include <string>
#include <vector>

namespace formsieve::backtransform {

/// One way back to own units, and what it leaves on held-out rows.
struct Correction {
  std::string method;             ///< "none", "smearing", …
  double factor = 1.0;            ///< mean corrected over mean uncorrected prediction on the rows in use
  std::optional<double> cv_bias;  ///< mean of predicted minus measured over held-out rows, own units
  std::optional<double> cv_rmse;  ///< own units
  std::optional<double> shift;    ///< mean corrected less mean uncorrected prediction on the rows in use, own units
  std::string note;               ///< why a figure is unset, or what the factor stands for
};

/// One kind of prediction interval, judged on held-out rows.
struct Interval {
  std::string method;                      ///< "normal theory", "CV+"
  double level = 0.95;                     ///< nominal
  std::optional<double> coverage;          ///< share of held-out rows inside
  std::optional<double> below, above;      ///< shares of held-out rows below the lower and above the upper end
  std::optional<double> median_width_own;  ///< over held-out rows
  std::string note;
};

/// What a term does to the response in own units, the other predictors at their medians.
struct Effect {
  std::string column;
  std::string kind;             ///< "elasticity", "quartiles", "range", "levels"
  double from = 0.0, to = 0.0;  ///< raw values compared; unset use for levels
  std::string from_level, to_level;
  std::optional<double> at_from, at_to;     ///< mean prediction in own units
  std::optional<double> change, low, high;  ///< own units, or for an elasticity the change in % for 10 % more
  std::string direction;                    ///< "rising", "falling", "rising then falling", …
  std::string declared;                     ///< "rising", "falling" or empty
  std::string words;                        ///< one sentence
};

struct Summary {
  double smearing_factor =
      1.0;  ///< ln: mean of exp(residual); otherwise the ratio of mean predictions, smeared over naive
  std::string used = "smearing";
  std::string formula;  ///< the mean in own units written out, "energy_kwh = 1.031 · exp(3.21 + 0.84·ln(floor_area))"
  std::vector<Correction> corrections;
  std::string why_used;           ///< one sentence
  std::string mean_median_words;  ///< the difference between predicting the mean and the median, with figures
  std::vector<Interval> intervals;
};

}  // namespace formsieve::backtransform

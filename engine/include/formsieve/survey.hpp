// Room survey: the profile of the columns: moments, skewness class, outlying values, what each form does to them. Knows
// nothing of models. May call: base, table, forms.
#pragma once

#include <formsieve/base.hpp>
#include <formsieve/forms.hpp>
#include <formsieve/table.hpp>

#include <cstddef>
#include <map>
#include <optional>
#include <string>
#include <utility>
#include <vector>

namespace formsieve::survey {

/// Declared physical bounds by column name: lowest, highest possible value (infinite where open).
using Bounds = std::map<std::string, std::pair<double, double>>;

/// What one form would do to one column.
struct FormTrial {
  forms::Form form;
  std::string label;  ///< "√(101 − fill_percent)"
  bool possible = false;
  std::string reason;                    ///< why it is impossible, or merged with another
  std::string repair;                    ///< what would admit it
  std::optional<double> skewness_after;  ///< G1 of the transformed values, forms of one column
  bool suggested = false;                ///< in the default menu
  std::string why;                       ///< why suggested, in words
};

struct ColumnProfile {
  forms::ColumnFacts facts;
  std::size_t n_missing = 0;
  double mean = 0.0, sd = 0.0, q1 = 0.0, median = 0.0,
         q3 = 0.0;               ///< quartiles by linear interpolation (Hyndman & Fan 1996, type 7)
  double excess_kurtosis = 0.0;  ///< G2, Joanes & Gill 1998
  double medcouple = 0.0;        ///< Brys, Hubert & Struyf 2004
  forms::SkewClass skew = forms::SkewClass::none;
  std::string direction;       ///< "right", "left" or "none"
  std::size_t n_outlying = 0;  ///< |0.6745·(x − median)/MAD| > 3.5, Iglewicz & Hoaglin 1993
  std::optional<double>
      box_cox_lambda;  ///< profile likelihood maximum of one column, positive columns (Box & Cox 1964)
  std::vector<FormTrial> forms;
  std::vector<std::string> notes;  ///< advice in words: log rule, range rule, constant, nearly as many levels as rows …
  bool set_aside = false;          ///< cannot serve as a predictor; the reason is the first note
};

struct Survey {
  std::string file;
  std::string sha256;
  std::size_t n_rows = 0;
  std::size_t rare_level_count = 0;    ///< text levels seen on fewer rows are pooled
  std::vector<ColumnProfile> columns;  ///< in table order
};

struct Options {
  Bounds bounds;
  std::size_t rare_level_count = 5;
  std::vector<std::string> ignore;
  std::string response;  ///< when given, its forms are response forms
};

/// Profiles every column of a table. Errors (kind data): a bound that the data break, an unknown column in options.
/// Cost O(columns · n log n).
Result<Survey> profile(const table::Table& table, const Options& options);

/// The facts and profile of one set of values; NaN counts as missing.
ColumnProfile profile_numbers(const std::string& name, std::vector<double> values,
                              std::optional<std::pair<double, double>> bounds);

/// Of the menu's one-column forms, those whose columns correlate beyond 0.9999 in absolute value on these rows are one
/// form: the simpler is kept.
forms::Menu merge_near_equal(forms::Menu menu, const std::vector<double>& values, const std::string& column);

}  // namespace formsieve::survey

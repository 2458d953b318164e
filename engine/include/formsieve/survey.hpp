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
  unsigned threads = 0;  ///< 0: all that the process may use; the result does not depend on it
};

/// Profiles every column of a table that is not ignored. A predictor that repeats an earlier one, or the response, in
/// every row is set aside too. Errors (kind data): a bound that the data break (the earliest row), bounds for text or
/// the wrong way round, an unknown column in options (the nearest named). Cost O(columns · n log n).
Result<Survey> profile(const table::Table& table, const Options& options);

/// Columns that cannot serve as predictors whatever the form, by name with the reason: no values, one value, one level,
/// nearly as many levels as rows, only rare levels, a copy of another column. Those that profile() sets aside, without
/// the cost of a profile: O(cells).
std::map<std::string, std::string> unusable_columns(const table::Table& table, const Options& options);

/// The facts and profile of one set of values as a predictor; NaN counts as missing, every other value is finite.
/// Moments that too few values leave undefined are 0, and a note says so.
ColumnProfile profile_numbers(const std::string& name, std::vector<double> values,
                              std::optional<std::pair<double, double>> bounds);

/// Of the menu's one-column forms, those whose columns correlate beyond 0.9999 in absolute value on these rows are one
/// form: the simpler is kept (forms::complexity, then menu order) and `merged` says so. A form of numbers with values
/// beyond the range of doubles on these rows is struck. NaN in `values` is passed over; forms of several columns and
/// levels are kept as they are. Cost O(entries² · n).
forms::Menu merge_near_equal(forms::Menu menu, const std::vector<double>& values, const std::string& column);

}  // namespace formsieve::survey

// Room model, result types: a fitted candidate as it is kept, enough to score rows that it has not seen. May call:
// base, forms.
//
// models.json in a run folder holds these records (engine/report/model_json.hpp); its keys are those of the members.
#pragma once

#include <formsieve/base.hpp>
#include <formsieve/forms.hpp>

#include <cstddef>
#include <cstdint>
#include <optional>
#include <string>
#include <vector>

namespace formsieve::model {

/// A predictor as it enters, and what the rows in use had of it.
struct Term {
  std::string column;
  forms::Form form;
  double seen_min = 0.0, seen_max = 0.0;  ///< raw values; unset use for levels
  forms::Interval defined{};              ///< raw values for which the form is defined; the whole line for levels
};

/// What the mean in own units needs of the training residuals e (response − fitted, form's scale; times √w where the
/// fit had weights). Members that the response form has no use for are 0 or empty.
struct MeanPart {
  /// Set: the mean is this factor times the uncorrected prediction, and nothing else here is used.
  std::optional<double> factor;
  double smallest = 0.0;                          ///< of e
  double first = 0.0, second = 0.0, third = 0.0;  ///< means of e, e², e³: identity, square root, cube root
  double mean_exp = 1.0;                          ///< mean of exp(e), or 10^e for log10
  double mean_cosh = 1.0, mean_sinh = 0.0;        ///< asinh
  std::vector<double> residuals;                  ///< e itself, or the means of 1,001 equal slices of the sorted e
};

/// How a prediction of the median becomes one of the mean.
struct MeanRule {
  std::string method = "smearing";  ///< as backtransform::Summary::used
  std::vector<double> cuts;         ///< rising, fitted values on the form's scale: up to cuts[i] part i holds
  std::vector<MeanPart> parts;      ///< cuts.size() + 1
};

/// One fold of the first repeat: the fit without its rows, and how far that was off on them.
struct Fold {
  std::vector<double> coefficients;   ///< [p]
  std::vector<double> residuals;      ///< |held-out residual| on the form's scale, times √w where weighted; rising
  std::vector<std::uint64_t> counts;  ///< how many rows each stands for; empty: one each
};

struct Model {
  std::size_t rank = 0;
  std::string number;              ///< of the candidate
  std::vector<std::string> marks;  ///< of "best", "recommended", …
  std::string equation;
  forms::Form response;
  std::vector<Term> terms;
  std::vector<double> coefficients;  ///< [p], intercept first, then the columns of the terms in their order
  std::vector<double> root;  ///< upper triangle R, row by row, p(p + 1)/2 values, with (XᵀWX)⁻¹ = RᵀR: h(x) = ‖R x‖²
  double sigma = 0.0;             ///< √(rss/df), form's scale; NaN without degrees of freedom
  std::size_t n = 0;              ///< rows in use; df = n − p
  double largest_leverage = 0.0;  ///< largest xᵀ(XᵀWX)⁻¹x over the rows in use
  MeanRule mean;
  std::vector<Fold> folds;

  double df() const { return static_cast<double>(n) - static_cast<double>(coefficients.size()); }
};

/// The models of one run.
struct ModelSet {
  std::string formsieve;  ///< version that wrote it
  std::string response;   ///< column
  std::string weight;     ///< column of case weights, or empty; a new row without one counts as w = 1
  std::vector<Model> models;
};

/// What can be wrong with a new row. A row has any number of them, as a sum of these.
enum Flag : std::uint8_t {
  kMissing = 1,    ///< a value is missing: no prediction
  kUnknown = 2,    ///< a level that the rows in use did not have: no prediction
  kUndefined = 4,  ///< a form, or the way back to own units, is undefined there: no prediction
  kOutside = 8,    ///< a value beyond the range of the rows in use
  kLeverage = 16,  ///< a combination further out than any row in use (leverage beyond the largest)
  kNoMean = 32,    ///< the median exists, the mean does not
  kOpenEnd = 64,   ///< an interval reaches the edge of what the response form allows: its end there is infinite
};
inline constexpr std::size_t kFlags = 7;
/// "missing", "unknown level", "undefined", "outside", "leverage", "no mean", "open interval".
const char* flag_name(std::size_t bit);

}  // namespace formsieve::model

#include <formsieve/forms.hpp>

#include "forms/functions.hpp"

#include <algorithm>
#include <array>
#include <cmath>

namespace formsieve::forms {

namespace {

struct KindText {
  std::string_view name, words;
};

// In the order of Kind.
constexpr std::array<KindText, 21> kTexts{{
    {"identity", "the column as it is"},
    {"square", "x²: a slope that grows with x"},
    {"cube", "x³: a slope that grows faster still, with the sign kept"},
    {"sqrt", "√x: a mild shortening of the right tail, usual for counts and areas; needs x ≥ 0"},
    {"cube-root", "∛x: shortens both tails and takes any sign"},
    {"ln", "ln x: equal ratios become equal steps; needs x > 0"},
    {"log10", "log10 x: ln x in other units, hence the same candidate; needs x > 0"},
    {"reciprocal", "1/x: a strong shortening of the right tail, a rate turned into a duration; needs x > 0"},
    {"reciprocal-sqrt", "1/√x: between ln x and 1/x; needs x > 0"},
    {"reciprocal-square", "1/x²: stronger than 1/x, an effect that fades with the square of a distance; needs x > 0"},
    {"exp", "exp x: equal steps become equal ratios; grows beyond use above x = 709"},
    {"asinh", "asinh x: like ln x far from zero, straight near it; takes any sign"},
    {"logit", "ln(x/(1 − x)): stretches both ends of a share; needs 0 < x < 1"},
    {"arcsine-sqrt", "arcsin √x: evens out the spread of a share and admits 0 and 1; needs 0 ≤ x ≤ 1"},
    {"power", "x^p with the p that is given; a p that is not whole needs x ≥ 0, a negative p x > 0"},
    {"box-cox",
     "(x^λ − 1)/λ, ln x at λ = 0: the power family made continuous (Box and Cox 1964); needs x > 0, or x ≥ 0 when λ > "
     "0"},
    {"yeo-johnson",
     "the Box-Cox family of 1 + |x|, bent to take any sign; at λ = 0 it is ln(1 + x) for x ≥ 0; "
     "printed YJ(x; λ) (Yeo and Johnson 2000)"},
    {"quadratic", "x and x² together: one bend"},
    {"fractional-polynomial",
     "two powers of x together, where x^0 stands for ln x and a repeated power brings x^p·ln x "
     "(Royston and Altman 1994); needs x > 0"},
    {"spline",
     "a smooth curve of cubic pieces, straight beyond its outer knots, with 3 to 5 knots at fixed quantiles "
     "(Stone and Koo 1985; Durrleman and Simon 1989)"},
    {"levels", "a text column: one shift for each level against the most frequent one"},
}};
static_assert(kTexts.size() == static_cast<std::size_t>(Kind::levels) + 1);

// Edges of the skewness classes: common practice, no source.
constexpr double kMildSkewness = 0.5, kModerateSkewness = 1.0, kSevereSkewness = 2.0;

}  // namespace

std::string_view kind_name(Kind kind) { return kTexts[static_cast<std::size_t>(kind)].name; }

std::optional<Kind> kind_from_name(std::string_view name) {
  for (std::size_t i = 0; i < kTexts.size(); ++i)
    if (kTexts[i].name == name) return static_cast<Kind>(i);
  return std::nullopt;
}

std::vector<std::string_view> kind_names() {
  std::vector<std::string_view> names;
  for (const KindText& text : kTexts) names.push_back(text.name);
  return names;
}

std::string describe(Kind kind) { return std::string(kTexts[static_cast<std::size_t>(kind)].words); }

SkewClass skew_class(double skewness_g1) {
  const double size = std::fabs(skewness_g1);
  if (!(size >= kMildSkewness)) return SkewClass::none;
  if (size <= kModerateSkewness) return SkewClass::mild;
  return size <= kSevereSkewness ? SkewClass::moderate : SkewClass::severe;
}

std::size_t n_columns(const Form& form) {
  switch (form.kind) {
    case Kind::quadratic:
    case Kind::fractional_polynomial:
      return 2;
    case Kind::spline:
      return form.parameters.size() - 1;
    case Kind::levels:
      return form.levels.empty() ? 0 : form.levels.size() - 1;
    default:
      return 1;
  }
}

std::optional<std::size_t> level_code(const Form& form, std::string_view level) {
  if (std::find(form.pooled.begin(), form.pooled.end(), level) != form.pooled.end()) return form.levels.size() - 1;
  // The last entry of a pooled form is the name of the pool, not a level of the column.
  const auto end = form.levels.end() - (form.pooled.empty() ? 0 : 1);
  const auto found = std::find(form.levels.begin(), end, level);
  if (found == end) return std::nullopt;
  return static_cast<std::size_t>(found - form.levels.begin());
}

std::vector<double> spline_probabilities(std::size_t n_knots) {
  switch (n_knots) {
    case 3:
      return {0.10, 0.50, 0.90};
    case 4:
      return {0.05, 0.35, 0.65, 0.95};
    case 5:
      return {0.05, 0.275, 0.50, 0.725, 0.95};
    default:
      return {};
  }
}

bool Interval::contains(double x) const noexcept {
  if (x > lower && x < upper) return true;
  return (lower_closed && x == lower) || (upper_closed && x == upper);
}

}  // namespace formsieve::forms

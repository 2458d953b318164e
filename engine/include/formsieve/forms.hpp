// Room forms: every form a column may take: forward, inverse, derivative, domain, parameters, printed equation; menus
// from facts about a column. Knows nothing of rows and folds. May call: base.
#pragma once

#include <formsieve/base.hpp>

#include <cstddef>
#include <map>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

namespace formsieve::forms {

enum class Kind {
  identity,
  square,
  cube,
  sqrt,
  cube_root,
  ln,
  log10,
  reciprocal,
  reciprocal_sqrt,
  reciprocal_square,
  exp,
  asinh,
  logit,
  arcsine_sqrt,  // plain
  power,
  box_cox,
  yeo_johnson,  // one parameter
  quadratic,
  fractional_polynomial,
  spline,  // several columns of a number
  levels,  // indicators of a text column
};

/// A function with its parameters. Its argument is u = (reflect given ? reflect − x : x) + shift, computed as
/// (reflect + shift) − x when reflected, so that only the sum of the two matters, to the bit.
///
/// Where each is defined (on u):
///   whole line       identity, square, cube, cube_root, exp, asinh, yeo_johnson, quadratic, spline, and power(p) with
///   a
///                    positive whole p
///   u ≥ 0            sqrt, power(p) with another positive p, box_cox(λ > 0)
///   u > 0            ln, log10, box_cox(λ ≤ 0), fractional_polynomial, and every negative power (reciprocal,
///                    reciprocal_sqrt, reciprocal_square, power(p < 0)): only the branch right of the pole, since a
///                    model fitted on one side says nothing of the other; a negative column is entered with reflect = 0
///   0 < u < 1        logit
///   0 ≤ u ≤ 1        arcsine_sqrt
/// box_cox(λ) is (u^λ − 1)/λ, ln u at λ = 0 (Box & Cox 1964). yeo_johnson(λ) is box_cox(λ) of 1 + u for u ≥ 0 and
/// −box_cox(2 − λ) of 1 − u below (Yeo & Johnson 2000). power(0) is the constant 1: it can be evaluated, but no menu
/// admits it.
///
/// Columns of the forms that span several: quadratic u, u²; fractional_polynomial (Royston & Altman 1994) u^p, u^q, or
/// u^p, u^p·ln u when p = q, with u^0 = ln u; spline (restricted cubic, Stone & Koo 1985) u and one column an inner
/// knot, each cubic term divided by the squared distance of the outer knots, which keeps the columns on the scale of u;
/// levels one indicator a level but the first.
struct Form {
  Kind kind = Kind::identity;
  std::vector<double> parameters = {};   ///< power p; Box-Cox or Yeo-Johnson λ; two powers of a fractional polynomial;
                                         ///< knots of a spline (on u)
  std::optional<double> reflect = {};    ///< anchor a of a reflected form, in the column's units
  double shift = 0.0;                    ///< in the column's units
  std::vector<std::string> levels = {};  ///< levels only: the reference first, then one per indicator
  std::vector<std::string> pooled =
      {};  ///< levels only: rare levels that the last entry of `levels` stands for; may be empty

  bool operator==(const Form&) const = default;
};

/// A set of real numbers between two edges.
struct Interval {
  double lower;       ///< may be −infinity
  double upper;       ///< may be +infinity
  bool lower_closed;  ///< the lower edge belongs to it
  bool upper_closed;
  bool contains(double x) const noexcept;
};

/// What the menus need to know of a column; computed by the survey from the rows in use.
struct ColumnFacts {
  std::string name = {};
  bool text = false;
  std::size_t n = 0;  ///< non-missing values
  double min = 0.0, max = 0.0;
  std::size_t n_zero = 0, n_negative = 0, n_distinct = 0;
  bool whole = false;       ///< every value is a whole number
  double resolution = 0.0;  ///< the largest power of ten, at most 1, of which every value is a whole multiple
  double skewness = 0.0;    ///< G1 of Joanes & Gill 1998
  std::optional<double> lower_bound = {}, upper_bound = {};  ///< physical bounds as declared
  std::vector<std::string> levels = {};  ///< text only, most frequent first (ties by first appearance)
  std::vector<std::size_t> level_counts = {};
  /// Number of knots (3, 4, 5) → that many quantiles of the raw values, at spline_probabilities(); needed only to
  /// settle a "spline". A number of knots may be missing.
  std::map<std::size_t, std::vector<double>> spline_knots = {};
};

/// A form as a plan asks for it, before `auto` is settled for a column.
struct Request {
  std::string form = {};                ///< a name from `kind_name`
  std::vector<double> parameters = {};  ///< of one form (a list in the plan has been spread out before); the number of
                                        ///< knots of a "spline"
  std::optional<double> reflect = {};   ///< unset: not reflected, unless reflect_auto
  bool reflect_auto = false;
  double shift = 0.0;
  bool shift_auto = false;
  std::size_t rare_level_count = 0;  ///< levels only: levels seen on fewer rows are pooled; 0 pools none
};

/// Skewness classes: common practice, no source. |G1| below 0.5 none, to 1 mild, to 2 moderate, above severe.
enum class SkewClass { none, mild, moderate, severe };
SkewClass skew_class(double skewness_g1);

// ---- names ----
std::string_view kind_name(Kind kind);  ///< "reciprocal-sqrt", as in plans and shortlist.json
std::optional<Kind> kind_from_name(std::string_view name);
std::vector<std::string_view> kind_names();  ///< all, in the order of Kind
/// What was done to the column, exactly: "ln(floor_area)", "√(101 − fill_percent)", "1/(x + 0.5)", "site = north"
/// (levels). `index` is the column within a form of several. Numbers with the fewest digits that read back.
std::string label(const Form& form, const std::string& column, std::size_t index = 0);
/// The same as one name for the whole form: "quadratic(x)", "levels(site)"; equals label() for forms of one column.
std::string term_name(const Form& form, const std::string& column);
/// The inverse written out around an argument: exp(·), (·)², 101 − exp(·) …
std::string inverse_label(const Form& form, const std::string& argument);
std::string describe(Kind kind);  ///< a sentence of plain words for help and menus

// ---- values ----
std::size_t n_columns(const Form& form);
/// Value of a form of one column at x; NaN where it is undefined.
double evaluate(const Form& form, double x);
/// Values of all n_columns(form) columns at x (for levels: x is a code from level_code). NaN where undefined.
void evaluate(const Form& form, double x, std::span<double> out);
/// Column-wise: x[n] to out[n_columns(form)*n], column-major. Same bits as the scalar call. Cost O(n·columns).
void evaluate_column(const Form& form, std::span<const double> x, std::span<double> out);
/// d form / dx, forms of one column; NaN where the form is undefined, infinite where the slope is (√ at 0).
double derivative(const Form& form, double x);
/// ln |d form / dx|, without overflow; the Jacobian term of a response form. +infinity where the slope is infinite (√
/// at 0) and −infinity where it is zero (the square at 0): the own-scale likelihood does not exist there, and
/// admissible() strikes response forms with an infinite slope at an end of the column.
double log_abs_derivative(const Form& form, double x);
/// Raw x for which the form is defined, exact to the double: a closed edge evaluates, an open one does not, the double
/// inside an open edge does. The whole line for levels.
Interval domain(const Form& form);
/// Levels only: the code that evaluate() takes. A pooled level has the code of the last entry of `levels`; unset for an
/// unknown level.
std::optional<std::size_t> level_code(const Form& form, std::string_view level);
/// Where the knots of a restricted cubic spline stand, as quantiles of the predictor (the fixed places in common use
/// after Durrleman & Simon 1989): 3, 4 or 5 probabilities; empty for another number.
std::vector<double> spline_probabilities(std::size_t n_knots);

// ---- response forms ----
/// Of one column and strictly monotone on response_domain(form), hence usable for a response whose values lie there.
bool invertible(const Form& form);
/// The raw x that inverse() returns to: domain(form), but u ≥ 0 alone for the even powers, which are not one-to-one
/// across zero.
Interval response_domain(const Form& form);
int monotone_sign(const Form& form);  ///< +1 rising, −1 falling in x on response_domain(form); 0 when not invertible
/// Values that the inverse accepts. A closed edge is one where the inverse is finite: arguments beyond it are moved
/// there.
Interval inverse_domain(const Form& form);
/// x in response_domain(form) with evaluate(form, x) = z. Beyond a closed edge of inverse_domain the edge's value;
/// otherwise NaN. Infinite where the value is too large for a double.
double inverse(const Form& form, double z);
/// The same for many z at once: x to out[n]. Same bits as the scalar call.
void inverse_column(const Form& form, std::span<const double> z, std::span<double> out);

// ---- menus ----
struct MenuEntry {
  Form form;
  std::string why = {};  ///< reason in words, marked as common practice where it is
};
struct Struck {
  std::string label = {};   ///< the form that was asked for or thought of
  std::string why = {};     ///< why it cannot be used on these rows
  std::string repair = {};  ///< what would admit it (a shift, a reflection); may be empty
};
struct Merged {
  std::string dropped = {}, kept = {};  ///< labels
  std::string why = {};
};
struct Menu {
  std::vector<MenuEntry> entries = {};
  std::vector<Struck> struck = {};
  std::vector<Merged> merged = {};
};

/// Settles `auto` for a column (design.md, "The plan"): reflect = upper bound (else largest value) plus one unit of
/// resolution, or plus 1 for whole numbers and when no bound is declared; shift = what makes the smallest u 1 for ln
/// and reciprocal families (and for box-cox and fractional polynomials, so that one shift serves every parameter), 0
/// for roots; no other form needs a shift, and `auto` is 0 there. Errors (kind plan): unknown form (nearest named),
/// wrong number of parameters, a parameter that is not finite, levels on a number, a number's form on text, power 0,
/// knots that are not distinct.
Result<Form> settle(const Request& request, const ColumnFacts& facts);

/// Whether a form read from a file has the parameters, levels and finite numbers that its kind needs, so that every
/// function here may be called with it. Errors (kind data).
Status check(const Form& form);

/// The small default menu of design.md for one predictor, and what was thought of but is impossible.
Menu default_menu(const ColumnFacts& facts, std::size_t rare_level_count);
/// The default response forms of design.md.
Menu default_response_menu(const ColumnFacts& facts);
/// Keeps the forms that are defined and finite on [facts.min, facts.max] and, by algebra, have different column spaces
/// (ln and log10, power(0.5) and sqrt …); the simpler is kept and the merge said. On a column of two values every form
/// is the same. `response`: also strikes what is not invertible, what leaves response_domain() and what has an infinite
/// slope at an end of the column (√ with a zero), since the likelihood in own units is then infinite whatever the fit.
Menu admissible(std::vector<MenuEntry> wanted, const ColumnFacts& facts, bool response);
/// True when the two forms span, with the intercept, the same column space by algebra, wherever both are defined.
bool equivalent(const Form& a, const Form& b);
/// Smaller is simpler: the order in which near-equal forms are kept.
int complexity(const Form& form);

}  // namespace formsieve::forms

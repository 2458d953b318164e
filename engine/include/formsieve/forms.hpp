// Room forms: every form a column may take: forward, inverse, derivative, domain, parameters, printed equation; menus
// from facts about a column. Knows nothing of rows and folds. May call: base.
#pragma once

#include <formsieve/base.hpp>

#include <cstddef>
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

/// A function with its parameters. Its argument is u = (reflect given ? reflect − x : x) + shift.
/// Columns of the forms that span several: quadratic u, u²; fractional_polynomial (Royston & Altman 1994) u^p, u^q, or
/// u^p, u^p·ln u when p = q, with u^0 = ln u; spline (restricted cubic, Stone & Koo 1985) u and one column an inner
/// knot; levels one indicator a level but the first.
struct Form {
  Kind kind = Kind::identity;
  std::vector<double> parameters;  ///< power p; Box-Cox or Yeo-Johnson λ; two powers of a fractional polynomial; knots
                                   ///< of a spline (on u)
  std::optional<double> reflect;   ///< anchor a of a reflected form, in the column's units
  double shift = 0.0;              ///< in the column's units
  std::vector<std::string> levels;  ///< levels only: the reference first, then one per indicator
  std::vector<std::string>
      pooled;  ///< levels only: rare levels that the last entry of `levels` stands for; may be empty

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
  std::string name;
  bool text = false;
  std::size_t n = 0;  ///< non-missing values
  double min = 0.0, max = 0.0;
  std::size_t n_zero = 0, n_negative = 0, n_distinct = 0;
  bool whole = false;       ///< every value is a whole number
  double resolution = 0.0;  ///< the largest power of ten, at most 1, of which every value is a whole multiple
  double skewness = 0.0;    ///< G1 of Joanes & Gill 1998
  std::optional<double> lower_bound, upper_bound;  ///< physical bounds as declared
  std::vector<std::string> levels;                 ///< text only, most frequent first (ties by first appearance)
  std::vector<std::size_t> level_counts;
};

/// A form as a plan asks for it, before `auto` is settled for a column.
struct Request {
  std::string form;                ///< a name from `kind_name`
  std::vector<double> parameters;  ///< of one form (a list in the plan has been spread out before)
  std::optional<double> reflect;   ///< unset: not reflected, unless reflect_auto
  bool reflect_auto = false;
  double shift = 0.0;
  bool shift_auto = false;
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
double derivative(const Form& form, double x);  ///< d form / dx, forms of one column; NaN where undefined
double log_abs_derivative(const Form& form,
                          double x);  ///< ln |d form / dx|, without overflow; the Jacobian term of a response form
Interval domain(const Form& form);    ///< raw x for which the form is defined
std::optional<std::size_t> level_code(const Form& form,
                                      std::string_view level);  ///< levels only; unset for an unknown level

// ---- response forms ----
/// Monotone on its domain and of one column, hence usable for a response whose values lie in domain(form).
bool invertible(const Form& form);
int monotone_sign(const Form& form);  ///< +1 rising, −1 falling in x
/// Values that the inverse accepts. A closed edge is one where the inverse is finite: arguments beyond it are moved
/// there.
Interval inverse_domain(const Form& form);
/// x with evaluate(form, x) = z. Beyond a closed edge of inverse_domain the edge's value; otherwise NaN.
double inverse(const Form& form, double z);

// ---- menus ----
struct MenuEntry {
  Form form;
  std::string why;  ///< reason in words, marked as common practice where it is
};
struct Struck {
  std::string label;   ///< the form that was asked for or thought of
  std::string why;     ///< why it cannot be used on these rows
  std::string repair;  ///< what would admit it (a shift, a reflection); may be empty
};
struct Merged {
  std::string dropped, kept;  ///< labels
  std::string why;
};
struct Menu {
  std::vector<MenuEntry> entries;
  std::vector<Struck> struck;
  std::vector<Merged> merged;
};

/// Settles `auto` for a column (design.md, "The plan"): reflect = upper bound (else largest value) plus one unit of
/// resolution, or plus 1 for whole numbers and when no bound is declared; shift = what makes the smallest u 1 for ln
/// and reciprocal families, 0 for roots. Errors (kind plan): unknown form (nearest named), wrong number of parameters,
/// a parameter that is not finite, levels on a number.
Result<Form> settle(const Request& request, const ColumnFacts& facts);

/// The small default menu of design.md for one predictor, and what was thought of but is impossible.
Menu default_menu(const ColumnFacts& facts, std::size_t rare_level_count);
/// The default response forms of design.md.
Menu default_response_menu(const ColumnFacts& facts);
/// Keeps the forms that are defined on [facts.min, facts.max] and, by algebra, have different column spaces (ln and
/// log10, power(0.5) and sqrt …); the simpler is kept and the merge said. `response`: also strikes what is not
/// invertible.
Menu admissible(std::vector<MenuEntry> wanted, const ColumnFacts& facts, bool response);
/// True when the two forms span, with the intercept, the same column space by algebra.
bool equivalent(const Form& a, const Form& b);
/// Smaller is simpler: the order in which near-equal forms are kept.
int complexity(const Form& form);

}  // namespace formsieve::forms

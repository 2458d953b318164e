#include "forms/settle.hpp"

#include "forms/functions.hpp"
#include "forms/text.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <functional>
#include <limits>

namespace formsieve::forms {

namespace {

Error plan_error(const ColumnFacts& facts, std::string message, std::string hint) {
  return {.kind = ErrorKind::plan,
          .message = std::move(message),
          .where = "column '" + facts.name + "'",
          .hint = std::move(hint)};
}

/// Beyond this many units of the resolution a double holds no fraction of a unit, and there is nothing to tidy.
constexpr double kMostUnits = 9007199254740992.0;  // 2^53

/// A sum of values of the column as the decimal number it stands for: 0.3 instead of 1 − 0.7.
double tidy(double value, const ColumnFacts& facts) {
  if (!(facts.resolution > 0.0)) return value;
  const double per_one = std::round(1.0 / facts.resolution);
  const double units = std::round(value * per_one);
  const bool is_unit = std::fabs(per_one * facts.resolution - 1.0) < 1e-9 && std::fabs(units) < kMostUnits;
  const double tidied = units / per_one;
  const bool same = std::fabs(tidied - value) <= 1e-9 * facts.resolution;
  return is_unit && same ? tidied : value;
}

enum class ShiftFamily { none, root, logarithm };

ShiftFamily shift_family(const Form& form) {
  switch (form.kind) {
    case Kind::sqrt:
    case Kind::cube_root:
      return ShiftFamily::root;
    case Kind::power: {
      const double p = form.parameters[0];
      if (p < 0.0) return ShiftFamily::logarithm;
      return p == std::floor(p) ? ShiftFamily::none : ShiftFamily::root;
    }
    case Kind::ln:
    case Kind::log10:
    case Kind::reciprocal:
    case Kind::reciprocal_sqrt:
    case Kind::reciprocal_square:
    case Kind::box_cox:
    case Kind::fractional_polynomial:
      return ShiftFamily::logarithm;
    default:
      return ShiftFamily::none;
  }
}

double smallest_argument(const Form& form, double shift, const ColumnFacts& facts) {
  return form.reflect ? (*form.reflect + shift) - facts.max : facts.min + shift;
}

std::size_t n_parameters(Kind kind) {
  if (kind >= Kind::power && kind <= Kind::yeo_johnson) return 1;
  if (kind == Kind::fractional_polynomial) return 2;
  return kind == Kind::spline ? 1 : 0;
}

std::string parameter_words(Kind kind) {
  switch (kind) {
    case Kind::power:
      return "one parameter, the power";
    case Kind::box_cox:
    case Kind::yeo_johnson:
      return "one parameter, λ";
    case Kind::fractional_polynomial:
      return "two parameters, its powers";
    case Kind::spline:
      return "one parameter, the number of knots";
    default:
      return "no parameter";
  }
}

std::string parameter_example(Kind kind) {
  const std::string form = "{ form = \"" + std::string(kind_name(kind)) + "\"";
  switch (kind) {
    case Kind::fractional_polynomial:
      return form + ", parameter = [0, 2] }";
    case Kind::spline:
      return form + ", parameter = 4 }";
    case Kind::power:
    case Kind::box_cox:
    case Kind::yeo_johnson:
      return form + ", parameter = 0.5 }";
    default:
      return form + " }";
  }
}

/// The form that another name in common use means; otherwise the nearest name, or nothing.
std::string_view meant_by(std::string_view name) {
  constexpr std::array<std::pair<std::string_view, std::string_view>, 6> kOtherNames{{{"log", "ln"},
                                                                                      {"cbrt", "cube-root"},
                                                                                      {"inverse", "reciprocal"},
                                                                                      {"linear", "identity"},
                                                                                      {"none", "identity"},
                                                                                      {"raw", "identity"}}};
  for (const auto& [other, kind] : kOtherNames)
    if (other == name) return kind;
  return nearest(name, kind_names());
}

Result<Kind> settle_kind(const Request& request, const ColumnFacts& facts) {
  const std::optional<Kind> kind = kind_from_name(request.form);
  if (!kind) {
    const std::string_view near = meant_by(request.form);
    return plan_error(
        facts, "there is no form '" + request.form + "'",
        near.empty() ? "formsieve help forms lists them all" : "did you mean '" + std::string(near) + "'?");
  }
  if (*kind == Kind::levels && !facts.text)
    return plan_error(facts, "levels are for text columns, and this one holds numbers",
                      "use a form of a number, or declare the column as text");
  if (*kind != Kind::levels && facts.text)
    return plan_error(facts, "'" + request.form + "' needs numbers, and this column holds text", "use 'levels'");
  return *kind;
}

Status check_numbers(const Request& request, Kind kind, const ColumnFacts& facts) {
  const std::string name = "'" + request.form + "'";
  if (request.parameters.size() != n_parameters(kind))
    return plan_error(
        facts, name + " takes " + parameter_words(kind) + "; " + std::to_string(request.parameters.size()) + " given",
        "write " + parameter_example(kind));
  const auto finite = [](double value) { return std::isfinite(value); };
  if (!std::all_of(request.parameters.begin(), request.parameters.end(), finite))
    return plan_error(facts, "a parameter of " + name + " is not a finite number", "write " + parameter_example(kind));
  if (!finite(request.shift) || !finite(request.reflect.value_or(0.0)))
    return plan_error(facts, "shift and reflect of " + name + " must be finite numbers", "write \"auto\" or a number");
  if (kind == Kind::power && request.parameters[0] == 0.0)
    return plan_error(facts, "the power 0 is the same for every row",
                      "use 'ln', which takes its place among the powers");
  return {};
}

/// Knots on u from the survey's quantiles of x.
Status place_knots(Form& form, double wanted, const ColumnFacts& facts) {
  const bool possible = wanted == 3.0 || wanted == 4.0 || wanted == 5.0;
  if (!possible)
    return plan_error(facts, "a spline has 3, 4 or 5 knots; " + number_text(wanted) + " asked for",
                      "write " + parameter_example(Kind::spline));
  const auto known = facts.spline_knots.find(static_cast<std::size_t>(wanted));
  std::vector<double> knots = known == facts.spline_knots.end() ? std::vector<double>{} : known->second;
  for (double& knot : knots) knot = form.reflect ? (*form.reflect + form.shift) - knot : knot + form.shift;
  std::sort(knots.begin(), knots.end());
  const bool distinct = std::adjacent_find(knots.begin(), knots.end()) == knots.end();
  if (knots.size() != static_cast<std::size_t>(wanted) || !distinct)
    return plan_error(facts, "the column has too few distinct values for a spline of " + number_text(wanted) + " knots",
                      wanted > 3.0 ? "ask for fewer knots, or use 'quadratic'" : "use 'quadratic'");
  form.parameters = std::move(knots);
  return {};
}

}  // namespace

double auto_reflect(const ColumnFacts& facts) {
  if (!facts.upper_bound || !std::isfinite(*facts.upper_bound)) return tidy(facts.max + 1.0, facts);
  const bool in_units = !facts.whole && facts.resolution > 0.0;
  return tidy(*facts.upper_bound + (in_units ? facts.resolution : 1.0), facts);
}

double auto_shift(const Form& form, const ColumnFacts& facts) {
  const ShiftFamily family = shift_family(form);
  if (family == ShiftFamily::none) return 0.0;
  const double target = family == ShiftFamily::logarithm ? 1.0 : 0.0;
  double shift = tidy(target - smallest_argument(form, 0.0, facts), facts) + 0.0;
  // Rounding must not leave a root's smallest value a hair below 0.
  const double size = std::max({std::fabs(shift), std::fabs(facts.min), std::fabs(facts.max)});
  while (smallest_argument(form, shift, facts) < 0.0) shift += std::numeric_limits<double>::epsilon() * size;
  return shift;
}

double half_unit(const ColumnFacts& facts) { return facts.resolution > 0.0 ? 0.5 * facts.resolution : 0.5; }

Form settle_levels(const ColumnFacts& facts, std::size_t rare_level_count) {
  Form form;
  form.kind = Kind::levels;
  for (std::size_t i = 0; i < facts.levels.size(); ++i) {
    const bool rare = i > 0 && i < facts.level_counts.size() && facts.level_counts[i] < rare_level_count;
    (rare ? form.pooled : form.levels).push_back(facts.levels[i]);
  }
  if (form.pooled.size() == 1) {  // a pool of one would only hide its name
    form.levels.push_back(form.pooled[0]);
    form.pooled.clear();
  }
  if (form.pooled.empty()) return form;
  std::string pool = "other levels (" + std::to_string(form.pooled.size()) + ")";
  while (std::find(facts.levels.begin(), facts.levels.end(), pool) != facts.levels.end()) pool.insert(0, "the ");
  form.levels.push_back(pool);
  return form;
}

Status check(const Form& form) {
  const auto broken = [&](const std::string& what) -> Error {
    return {.kind = ErrorKind::data,
            .message = "the form '" + std::string(kind_name(form.kind)) + "' " + what,
            .where = {},
            .hint = {}};
  };
  const std::vector<double>& numbers = form.parameters;
  const bool spline = form.kind == Kind::spline;
  const bool enough = spline ? numbers.size() >= 3 && numbers.size() <= 5 : numbers.size() == n_parameters(form.kind);
  if (!enough) return broken("has " + std::to_string(numbers.size()) + " parameters");
  const auto finite = [](double value) { return std::isfinite(value); };
  const bool all_finite =
      std::all_of(numbers.begin(), numbers.end(), finite) && finite(form.shift) && finite(form.reflect.value_or(0.0));
  if (!all_finite) return broken("holds a number that is not finite");
  if (spline && std::adjacent_find(numbers.begin(), numbers.end(), std::greater_equal<>()) != numbers.end())
    return broken("has knots that do not rise");
  if (form.kind == Kind::levels && form.levels.empty()) return broken("has no level");
  return {};
}

Result<Form> settle(const Request& request, const ColumnFacts& facts) {
  const Result<Kind> kind = settle_kind(request, facts);
  if (!kind) return kind.error();
  if (const Status numbers = check_numbers(request, *kind, facts); !numbers) return numbers.error();
  if (*kind == Kind::levels) return settle_levels(facts, request.rare_level_count);

  Form form{.kind = *kind, .parameters = request.parameters, .reflect = request.reflect, .shift = request.shift};
  if (request.reflect_auto) form.reflect = auto_reflect(facts);
  if (request.shift_auto) form.shift = auto_shift(form, facts);
  if (*kind != Kind::spline) return form;
  if (const Status placed = place_knots(form, request.parameters[0], facts); !placed) return placed.error();
  return form;
}

}  // namespace formsieve::forms

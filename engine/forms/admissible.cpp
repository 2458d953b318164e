#include <formsieve/forms.hpp>

#include "forms/equivalence.hpp"
#include "forms/settle.hpp"
#include "forms/text.hpp"

#include <cmath>

namespace formsieve::forms {

namespace {

/// A form as a plan writes it, for a repair that can be typed: { form = "ln", shift = 1 }.
std::string plan_text(const Form& form) {
  std::string text = "{ form = \"" + std::string(kind_name(form.kind)) + "\"";
  if (form.parameters.size() == 1) text += ", parameter = " + plan_number(form.parameters[0]);
  if (form.kind == Kind::fractional_polynomial)
    text += ", parameter = [" + plan_number(form.parameters[0]) + ", " + plan_number(form.parameters[1]) + "]";
  if (form.reflect) text += ", reflect = " + plan_number(*form.reflect);
  if (form.shift != 0.0) text += ", shift = " + plan_number(form.shift);
  return text + " }";
}

/// The first of smallest and largest value that lies outside an interval of raw values; unset when neither does.
std::optional<double> outlier(const Interval& allowed, const ColumnFacts& facts) {
  if (!allowed.contains(facts.min)) return facts.min;
  if (!allowed.contains(facts.max)) return facts.max;
  return std::nullopt;
}

std::string extreme_words(double value, const ColumnFacts& facts) {
  return number_text(value) + ", the " + (value == facts.min ? "smallest" : "largest") + " value of " + facts.name;
}

/// The shift that would bring every value into the domain.
std::string repair_of_domain(const Form& form, const ColumnFacts& facts) {
  if (form.kind == Kind::arcsine_sqrt || form.kind == Kind::logit) {
    if (facts.min >= 0.0 && facts.max <= 1.0) return "use 'arcsine-sqrt', which admits 0 and 1";
    return "only a share between 0 and 1 can take this form; a percentage must be divided by 100 first";
  }
  Form repaired = form;
  repaired.shift = auto_shift(form, facts);
  return "write " + plan_text(repaired);
}

std::optional<Struck> refusal_by_type(const Form& form, const ColumnFacts& facts) {
  const std::string name = term_name(form, facts.name);
  if (form.kind == Kind::levels && !facts.text) return Struck{name, "levels are for text columns", ""};
  if (form.kind != Kind::levels && facts.text) return Struck{name, "the column holds text", "use 'levels'"};
  if (form.kind == Kind::levels && form.levels.size() < 2)
    return Struck{name, facts.name + " has one level only, so it can explain nothing", ""};
  if (form.kind == Kind::power && form.parameters[0] == 0.0)
    return Struck{name, "the power 0 is the same for every row", "use 'ln'"};
  const std::size_t columns = n_columns(form);
  if (columns > 1 && !facts.text && facts.n_distinct > 0 && facts.n_distinct <= columns)
    return Struck{name,
                  facts.name + " takes " + std::to_string(facts.n_distinct) + " values, too few for the " +
                      std::to_string(columns) + " columns of this form",
                  "use a form of one column"};
  return std::nullopt;
}

std::optional<Struck> refusal_by_values(const Form& form, const ColumnFacts& facts) {
  const std::string name = term_name(form, facts.name);
  if (const auto value = outlier(domain(form), facts))
    return Struck{name, "undefined at " + extreme_words(*value, facts), repair_of_domain(form, facts)};
  std::vector<double> columns(n_columns(form));
  for (const double value : {facts.min, facts.max}) {
    evaluate(form, value, columns);
    for (const double column : columns)
      if (!std::isfinite(column))
        return Struck{name, "too large for the computer at " + extreme_words(value, facts),
                      "use a form that grows more slowly, or another unit"};
  }
  return std::nullopt;
}

/// Where the slope of a response form is infinite the Jacobian is, and with it the likelihood of every candidate.
std::optional<double> infinite_slope(const Form& form, const ColumnFacts& facts) {
  for (const double value : {facts.min, facts.max})
    if (log_abs_derivative(form, value) == HUGE_VAL) return value;
  // The cube root alone is infinitely steep inside its domain.
  if (facts.n_zero > 0 && log_abs_derivative(form, 0.0) == HUGE_VAL) return 0.0;
  return std::nullopt;
}

std::optional<Struck> refusal_as_response(const Form& form, const ColumnFacts& facts) {
  const std::string name = term_name(form, facts.name);
  if (!invertible(form))
    return Struck{name,
                  "a response form must be one rising or falling function, so that predictions can be turned back", ""};
  Form repaired = form;
  if (const auto value = outlier(response_domain(form), facts)) {
    repaired.shift += form.reflect ? facts.max - (*form.reflect + form.shift) : -(facts.min + form.shift);
    return Struck{name, "not one-to-one down to " + extreme_words(*value, facts) + ": two values share one result",
                  "write " + plan_text(repaired)};
  }
  if (const auto value = infinite_slope(form, facts)) {
    repaired.shift += half_unit(facts);
    const bool mendable = form.kind != Kind::arcsine_sqrt && form.kind != Kind::cube_root;
    return Struck{name,
                  "infinitely steep at " + number_text(*value) + ", which " + facts.name +
                      " takes: the likelihood in own units would be infinite whatever the fit",
                  mendable ? "write " + plan_text(repaired) : ""};
  }
  return std::nullopt;
}

std::optional<Struck> refusal(const Form& form, const ColumnFacts& facts, bool response) {
  if (auto struck = refusal_by_type(form, facts)) return struck;
  if (facts.text) return std::nullopt;
  if (auto struck = refusal_by_values(form, facts)) return struck;
  return response ? refusal_as_response(form, facts) : std::nullopt;
}

/// Why two forms are one on this column; empty when they are not.
std::string sameness(const Form& a, const Form& b, const ColumnFacts& facts) {
  if (a == b) return "listed twice";
  if (equivalent_on(a, b, facts))
    return "the two differ by a factor and a constant alone, which the coefficients take up";
  if (!facts.text && facts.n_distinct == 2 && n_columns(a) == 1 && n_columns(b) == 1)
    return facts.name + " takes two values only, so every form of it is the same split of the rows";
  return {};
}

/// True when entry i gives way to entry j: simpler, or as simple and listed before.
bool gives_way(const std::vector<MenuEntry>& entries, std::size_t i, std::size_t j) {
  const int own = complexity(entries[i].form), other = complexity(entries[j].form);
  return other < own || (other == own && j < i);
}

}  // namespace

Menu admissible(std::vector<MenuEntry> wanted, const ColumnFacts& facts, bool response) {
  Menu menu;
  std::vector<MenuEntry> possible;
  for (MenuEntry& entry : wanted) {
    if (auto struck = refusal(entry.form, facts, response))
      menu.struck.push_back(std::move(*struck));
    else
      possible.push_back(std::move(entry));
  }
  for (std::size_t i = 0; i < possible.size(); ++i) {
    std::optional<std::size_t> kept;
    for (std::size_t j = 0; j < possible.size(); ++j)
      if (j != i && gives_way(possible, i, j) && !sameness(possible[i].form, possible[j].form, facts).empty() &&
          (!kept || gives_way(possible, *kept, j)))
        kept = j;
    if (kept)
      menu.merged.push_back({term_name(possible[i].form, facts.name), term_name(possible[*kept].form, facts.name),
                             sameness(possible[i].form, possible[*kept].form, facts)});
    else
      menu.entries.push_back(possible[i]);
  }
  return menu;
}

}  // namespace formsieve::forms

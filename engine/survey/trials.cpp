#include "survey/trials.hpp"

#include <algorithm>
#include <array>
#include <cmath>

#include "survey/moments.hpp"

namespace formsieve::survey {

namespace {

constexpr std::array kPlain = {
    forms::Kind::identity,          forms::Kind::square, forms::Kind::cube,       forms::Kind::sqrt,
    forms::Kind::cube_root,         forms::Kind::ln,     forms::Kind::reciprocal, forms::Kind::reciprocal_sqrt,
    forms::Kind::reciprocal_square, forms::Kind::exp,    forms::Kind::asinh};
/// Tried on shares only: elsewhere that they are impossible is no news.
constexpr std::array kOfShares = {forms::Kind::logit, forms::Kind::arcsine_sqrt};
/// The forms that a shift or a reflection can admit and that default menus draw from.
constexpr std::array kRepaired = {forms::Kind::sqrt, forms::Kind::ln, forms::Kind::reciprocal};

forms::Request request(forms::Kind kind) {
  forms::Request out;
  out.form = std::string(forms::kind_name(kind));
  return out;
}

bool holds(const std::vector<forms::MenuEntry>& entries, const forms::Form& form) {
  return std::any_of(entries.begin(), entries.end(), [&](const auto& entry) { return entry.form == form; });
}

/// Everything worth looking at for such a column, each form once.
std::vector<forms::MenuEntry> catalogue(const forms::ColumnFacts& facts) {
  std::vector<forms::MenuEntry> out;
  const auto add = [&](const forms::Request& wanted) {
    const Result<forms::Form> form = forms::settle(wanted, facts);
    if (form && !holds(out, *form)) out.push_back({*form, ""});
  };
  if (facts.n_distinct <= 2) {
    add(request(forms::Kind::identity));  // any form is the same split of the rows
    return out;
  }
  for (const forms::Kind kind : kPlain) add(request(kind));
  forms::Request signed_log = request(forms::Kind::yeo_johnson);
  signed_log.parameters = {0.0};
  add(signed_log);
  for (const forms::Kind kind : kOfShares)
    if (facts.min >= 0.0 && facts.max <= 1.0) add(request(kind));
  for (const forms::Kind kind : kRepaired) {
    forms::Request shifted = request(kind);
    shifted.shift_auto = true;
    if (facts.min <= 0.0) add(shifted);
  }
  for (const forms::Kind kind : kRepaired) {
    forms::Request reflected = request(kind);
    reflected.reflect_auto = true;
    if (facts.skewness < 0.0 && forms::skew_class(facts.skewness) != forms::SkewClass::none) add(reflected);
  }
  return out;
}

forms::Menu suggestions(const forms::ColumnFacts& facts, std::span<const double> present, Role role) {
  if (role == Role::response) return forms::default_response_menu(facts);
  return merge_near_equal(forms::default_menu(facts, 0), {present.begin(), present.end()}, facts.name);
}

/// Why a form is missing from the possible ones, as the menu that left it out says.
void explain_absence(FormTrial& trial, const forms::Menu& menu) {
  for (const forms::Struck& struck : menu.struck)
    if (struck.label == trial.label) {
      trial.reason = struck.why;
      trial.repair = struck.repair;
    }
}

void explain_merging(FormTrial& trial, const forms::Menu& menu) {
  for (const forms::Merged& merged : menu.merged)
    if (merged.dropped == trial.label) trial.reason = "one form with " + merged.kept + ": " + merged.why;
}

/// Transforms the column, which may overflow though the form is defined.
void transform(FormTrial& trial, std::span<const double> present) {
  if (forms::n_columns(trial.form) != 1) return;
  std::vector<double> transformed(present.size());
  forms::evaluate_column(trial.form, present, transformed);
  if (std::all_of(transformed.begin(), transformed.end(), [](double z) { return std::isfinite(z); })) {
    trial.skewness_after = moments(transformed).skewness;
    return;
  }
  trial.possible = false;
  trial.reason = "some of its values on these rows are beyond the range of numbers";
  trial.repair = "measure the column in larger or smaller units";
}

}  // namespace

std::vector<FormTrial> try_forms(const forms::ColumnFacts& facts, std::span<const double> present, Role role) {
  const forms::Menu suggested = suggestions(facts, present, role);
  std::vector<forms::MenuEntry> wanted = catalogue(facts);
  for (const forms::MenuEntry& entry : suggested.entries)
    if (!holds(wanted, entry.form)) wanted.push_back(entry);
  const forms::Menu admitted = forms::admissible(wanted, facts, role == Role::response);

  std::vector<FormTrial> trials;
  for (const forms::MenuEntry& entry : wanted) {
    FormTrial trial;
    trial.form = entry.form;
    trial.label = forms::term_name(entry.form, facts.name);
    explain_absence(trial, admitted);
    trial.possible = trial.reason.empty();
    explain_merging(trial, admitted);
    explain_merging(trial, suggested);
    if (trial.possible) transform(trial, present);
    for (const forms::MenuEntry& chosen : suggested.entries)
      if (trial.possible && chosen.form == trial.form) {
        trial.suggested = true;
        trial.why = chosen.why;
      }
    trials.push_back(std::move(trial));
  }
  return trials;
}

}  // namespace formsieve::survey

// Whether two plans say the same: all settings, not where they stand.
#pragma once

#include <formsieve/run.hpp>

#include <cmath>
#include <tuple>

namespace formsieve::run {

/// Equal to the bit: −0 is not 0.
inline bool same_number(double a, double b) { return a == b && std::signbit(a) == std::signbit(b); }

inline bool same_number(const std::optional<double>& a, const std::optional<double>& b) {
  return a.has_value() == b.has_value() && (!a || same_number(*a, *b));
}

inline bool same_entry(const FormEntry& a, const FormEntry& b) {
  if (a.parameters.size() != b.parameters.size()) return false;
  for (std::size_t i = 0; i < a.parameters.size(); ++i)
    if (!same_number(a.parameters[i], b.parameters[i])) return false;
  return a.form == b.form && same_number(a.reflect, b.reflect) && a.reflect_auto == b.reflect_auto &&
         same_number(a.shift, b.shift) && a.shift_auto == b.shift_auto;
}

inline bool same_menu(const std::vector<FormEntry>& a, const std::vector<FormEntry>& b) {
  if (a.size() != b.size()) return false;
  for (std::size_t i = 0; i < a.size(); ++i)
    if (!same_entry(a[i], b[i])) return false;
  return true;
}

inline bool same_menu(const std::optional<std::vector<FormEntry>>& a, const std::optional<std::vector<FormEntry>>& b) {
  return a.has_value() == b.has_value() && (!a || same_menu(*a, *b));
}

inline bool same_data(const Plan::Data& a, const Plan::Data& b) {
  const auto all = [](const Plan::Data& d) {
    return std::tie(d.file, d.query, d.response, d.ignore, d.weight, d.group, d.order, d.fold, d.bounds, d.separator,
                    d.decimal, d.missing, d.text, d.rare_levels);
  };
  return all(a) == all(b);
}

inline bool same_forms(const Plan::Forms& a, const Plan::Forms& b) {
  if (!same_menu(a.response, b.response) || !same_menu(a.default_menu, b.default_menu)) return false;
  if (a.always != b.always || a.direction != b.direction || a.of.size() != b.of.size()) return false;
  for (const auto& [column, menu] : a.of) {
    const auto other = b.of.find(column);
    if (other == b.of.end() || !same_menu(menu, other->second)) return false;
  }
  return true;
}

inline bool same_search(const Plan::Search& a, const Plan::Search& b) {
  const auto all = [](const Plan::Search& s) {
    return std::tie(s.strategy, s.max_terms, s.within, s.folds, s.repeats, s.seed, s.pool, s.budget_seconds);
  };
  return all(a) == all(b);
}

inline bool same_rank(const Plan::Rank& a, const Plan::Rank& b) {
  return std::tie(a.by, a.shortlist, a.near_tie, a.require, a.families) ==
         std::tie(b.by, b.shortlist, b.near_tie, b.require, b.families);
}

inline bool same_plan(const Plan& a, const Plan& b) {
  return same_data(a.data, b.data) && same_forms(a.forms, b.forms) && same_search(a.search, b.search) &&
         same_rank(a.rank, b.rank);
}

}  // namespace formsieve::run

// The default menus of design.md ("Default menus are small").
#include <formsieve/forms.hpp>

#include "forms/settle.hpp"

#include <cmath>

namespace formsieve::forms {

namespace {

Form plain(Kind kind) { return {.kind = kind}; }

Form shifted(Kind kind, double shift) { return {.kind = kind, .shift = shift}; }

Form reflected(Kind kind, const ColumnFacts& facts) { return {.kind = kind, .reflect = auto_reflect(facts)}; }

Form yeo_johnson(double lambda) { return {.kind = Kind::yeo_johnson, .parameters = {lambda}}; }

bool skewed(const ColumnFacts& facts) { return skew_class(facts.skewness) != SkewClass::none; }
bool left_skewed(const ColumnFacts& facts) { return skewed(facts) && facts.skewness < 0.0; }
bool severe(const ColumnFacts& facts) { return skew_class(facts.skewness) == SkewClass::severe; }

/// Values in [0, 1] that are not declared to mean anything else.
bool is_share(const ColumnFacts& facts) {
  const bool inside = facts.min >= 0.0 && facts.max <= 1.0;
  return inside && facts.lower_bound.value_or(0.0) >= 0.0 && facts.upper_bound.value_or(1.0) <= 1.0;
}

/// "severely skewed to the right" and the like.
std::string skew_words(const ColumnFacts& facts) {
  const std::string side = facts.skewness < 0.0 ? " skewed to the left" : " skewed to the right";
  switch (skew_class(facts.skewness)) {
    case SkewClass::none:
      return "hardly skewed";
    case SkewClass::mild:
      return "mildly" + side;
    case SkewClass::moderate:
      return "moderately" + side;
    case SkewClass::severe:
      return "severely" + side;
  }
  return {};
}

/// The reason for one rung of √, ln, reciprocal, saying where common practice would look first.
std::string rung_why(const std::string& what, SkewClass usual, const ColumnFacts& facts) {
  const bool first = skew_class(facts.skewness) == usual;
  return what + (first ? "; the usual first choice for a column " + skew_words(facts) + " (common practice)" : "");
}

void add_positive(std::vector<MenuEntry>& wanted, const ColumnFacts& facts) {
  const bool zero_allowed = facts.lower_bound && *facts.lower_bound <= 0.0 && std::isfinite(*facts.lower_bound);
  const std::string caution = zero_allowed ? "; new rows at 0, which the declared bounds allow, cannot be scored" : "";
  wanted.push_back({plain(Kind::sqrt), rung_why("positive column", SkewClass::mild, facts)});
  wanted.push_back({plain(Kind::ln), rung_why("positive column", SkewClass::moderate, facts) + caution});
  wanted.push_back({plain(Kind::reciprocal), rung_why("positive column", SkewClass::severe, facts) + caution});
}

void add_with_zeros(std::vector<MenuEntry>& wanted, Menu& menu, const ColumnFacts& facts) {
  const Form ln = shifted(Kind::ln, auto_shift(plain(Kind::ln), facts));
  wanted.push_back({plain(Kind::sqrt), rung_why("takes the zeros as they are", SkewClass::mild, facts)});
  wanted.push_back(
      {ln, rung_why("shifted so that the smallest value becomes 1 (common practice), since ln 0 is undefined",
                    SkewClass::moderate, facts)});
  for (const Kind kind : {Kind::ln, Kind::reciprocal})
    menu.struck.push_back({label(plain(kind), facts.name), "undefined at the zeros of " + facts.name,
                           "write { form = \"" + std::string(kind_name(kind)) + "\", shift = \"auto\" }"});
}

void add_reflected(std::vector<MenuEntry>& wanted, const ColumnFacts& facts) {
  const std::string why = skew_words(facts) +
                          ": reflected first, since the form of the raw column would stretch its "
                          "left tail (common practice)";
  wanted.push_back({reflected(Kind::sqrt, facts), why});
  wanted.push_back({reflected(Kind::ln, facts), why});
  if (severe(facts)) wanted.push_back({reflected(Kind::reciprocal, facts), why});
}

void add_share(std::vector<MenuEntry>& wanted, Menu& menu, const ColumnFacts& facts) {
  const bool strictly_inside = facts.min > 0.0 && facts.max < 1.0;
  if (strictly_inside) {
    wanted.push_back(
        {plain(Kind::logit), "a share strictly between 0 and 1: both ends are stretched (common practice)"});
    return;
  }
  wanted.push_back(
      {plain(Kind::arcsine_sqrt), "a share that reaches 0 or 1, where the logit is undefined (common practice)"});
  menu.struck.push_back(
      {label(plain(Kind::logit), facts.name),
       facts.name + (facts.min > 0.0 ? " reaches 1" : " reaches 0") + ", where the logit is undefined",
       "use 'arcsine-sqrt', which admits 0 and 1"});
}

void add_signed(std::vector<MenuEntry>& wanted, const ColumnFacts& facts) {
  if (!skewed(facts)) return;
  const bool left = left_skewed(facts);
  wanted.push_back({yeo_johnson(left ? 2.0 : 0.0), std::string("takes both signs and shortens the ") +
                                                       (left ? "left" : "right") + " tail of a column " +
                                                       skew_words(facts) + (left ? "; the mirror image of λ = 0" : "") +
                                                       " (common practice)"});
  wanted.push_back({plain(Kind::cube_root), "takes both signs and shortens both tails (common practice)"});
}

/// Forms that the column's values rule out are told with their reasons; those left are merged where equal.
Menu finished(std::vector<MenuEntry> wanted, Menu menu, const ColumnFacts& facts, bool response) {
  Menu checked = admissible(std::move(wanted), facts, response);
  checked.struck.insert(checked.struck.begin(), menu.struck.begin(), menu.struck.end());
  return checked;
}

const char* few_values_why(const ColumnFacts& facts) {
  return facts.n_distinct < 2 ? "constant: it can explain nothing"
                              : "two values only: every form is the same split of the rows";
}

Menu levels_menu(const ColumnFacts& facts, std::size_t rare_level_count) {
  const Form form = settle_levels(facts, rare_level_count);
  const std::string pooled = form.pooled.empty()
                                 ? std::string()
                                 : "; " + std::to_string(form.pooled.size()) + " levels on fewer than " +
                                       std::to_string(rare_level_count) + " rows are pooled";
  const std::string reference = form.levels.empty() ? "" : form.levels[0];
  return admissible({{form, "text column: one indicator for each level but the most frequent, " + reference + pooled}},
                    facts, false);
}

}  // namespace

Menu default_menu(const ColumnFacts& facts, std::size_t rare_level_count) {
  if (facts.text) return levels_menu(facts, rare_level_count);
  if (facts.n_distinct <= 2) return {{{plain(Kind::identity), few_values_why(facts)}}, {}, {}};
  Menu menu;
  std::vector<MenuEntry> wanted{{plain(Kind::identity), "always tried"}};
  if (facts.n_negative > 0)
    add_signed(wanted, facts);
  else if (left_skewed(facts))
    add_reflected(wanted, facts);
  else if (facts.n_zero > 0)
    add_with_zeros(wanted, menu, facts);
  else
    add_positive(wanted, facts);
  if (is_share(facts)) add_share(wanted, menu, facts);
  return finished(std::move(wanted), std::move(menu), facts, false);
}

Menu default_response_menu(const ColumnFacts& facts) {
  if (facts.n_distinct <= 2) return {{{plain(Kind::identity), few_values_why(facts)}}, {}, {}};
  Menu menu;
  std::vector<MenuEntry> wanted{{plain(Kind::identity), "always tried"}};
  if (facts.n_negative > 0) {
    wanted.push_back({yeo_johnson(0.0), "takes both signs; like ln on the right of zero"});
  } else if (facts.n_zero > 0) {
    wanted.push_back(
        {shifted(Kind::sqrt, half_unit(facts)),
         "zeros: √ with half of one unit of the resolution added (Bartlett 1936 for counts), since the slope "
         "of √ at 0 is infinite and would make the likelihood in own units infinite"});
    menu.struck.push_back(
        {label(plain(Kind::ln), facts.name),
         "undefined at the zeros of " + facts.name + ", and a shift chosen for them would decide the fit",
         "write { form = \"ln\", shift = \"auto\" } if ln(" + facts.name + " + shift) has a meaning here"});
  } else {
    wanted.push_back({plain(Kind::sqrt), "positive response: steadies a spread that grows with the root of the mean"});
    wanted.push_back({plain(Kind::ln), "positive response: steadies a spread in proportion to the mean"});
    if (severe(facts) && facts.skewness > 0.0)
      wanted.push_back({plain(Kind::reciprocal), "positive response " + skew_words(facts) + " (common practice)"});
  }
  return finished(std::move(wanted), std::move(menu), facts, true);
}

}  // namespace formsieve::forms

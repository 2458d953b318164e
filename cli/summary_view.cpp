#include "summary_view.hpp"

#include "numbers.hpp"
#include "words.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <optional>

namespace formsieve::cli {
namespace {

using judge::FormStanding;
using judge::PredictorProfile;
using judge::Reach;
using judge::Shortlist;
using judge::TermsStanding;

// Two tables that stay short: the rest is counted, and is in shortlist.json.
constexpr std::size_t kMostPredictors = 20;
constexpr std::size_t kMostOtherForms = 5;
constexpr std::size_t kMostNumbersOfTerms = 14;
// Numbers of terms that are shown beyond the best one, so that the reader sees the error rise again.
constexpr std::size_t kBeyondBest = 2;
constexpr std::size_t kLeastOthers = 20;
constexpr double kPercent = 100.0;

// "3.1 %" of a share of 0.031; whole per cents from ten on.
std::string percent(double share) { return with_decimals(kPercent * share, kPercent * share < 9.95 ? 1 : 0) + " %"; }

std::string loss_words(const std::optional<double>& loss) { return loss ? "+" + percent(*loss) : "not scored"; }

std::string share_words(const std::optional<double>& share) { return share ? with_decimals(*share, 2) : "undefined"; }

double cost(const Reach& reach) { return reach.cv_loss_rel.value_or(std::numeric_limits<double>::infinity()); }

// One predictor under one response form.
struct Line {
  const PredictorProfile* predictor = nullptr;
  const FormStanding* best = nullptr;
  const FormStanding* left_out = nullptr;   // null when it is always in
  std::vector<const FormStanding*> others;  // rising cost
};

// Both tables for one response form.
struct View {
  const Shortlist& shortlist;
  std::size_t response = 0;
  std::string criterion;
  bool whole = false;  // nothing is cut to a screen

  const Reach& reach(const judge::Standing& standing) const { return standing.by_response[response]; }
  double cost_of(const FormStanding* choice) const {
    return choice == nullptr ? std::numeric_limits<double>::infinity() : cost(reach(choice->standing));
  }
};

Line line_of(const View& view, const PredictorProfile& predictor) {
  Line line;
  line.predictor = &predictor;
  const auto cheaper = [&](const FormStanding* a, const FormStanding* b) { return view.cost_of(a) < view.cost_of(b); };
  for (const FormStanding& choice : predictor.choices) {
    if (line.best == nullptr || cheaper(&choice, line.best)) line.best = &choice;
    if (!choice.form) line.left_out = &choice;
  }
  for (const FormStanding& choice : predictor.choices) {
    if (choice.form && &choice != line.best) line.others.push_back(&choice);
  }
  std::stable_sort(line.others.begin(), line.others.end(), cheaper);
  return line;
}

// Dearest to leave out first; what is always in before all.
std::vector<Line> lines_of(const View& view) {
  std::vector<Line> lines;
  for (const PredictorProfile& predictor : view.shortlist.summary.predictors) {
    if (!predictor.choices.empty()) lines.push_back(line_of(view, predictor));
  }
  std::stable_sort(lines.begin(), lines.end(),
                   [&](const Line& a, const Line& b) { return view.cost_of(a.left_out) > view.cost_of(b.left_out); });
  return lines;
}

std::string left_out_words(const View& view, const Line& line) {
  if (line.left_out == nullptr) return "always in";
  return line.left_out == line.best ? "best" : loss_words(view.reach(line.left_out->standing).cv_loss_rel);
}

// "√(x) +3.1 %, untransformed +41 %": a form and its figure are not torn apart.
std::string others_words(const View& view, const Line& line) {
  std::vector<std::string> parts;
  // One more is named where the count would stand for it alone.
  const std::size_t shown =
      view.whole || line.others.size() <= kMostOtherForms + 1 ? line.others.size() : kMostOtherForms;
  for (std::size_t i = 0; i < shown; ++i) {
    const FormStanding& other = *line.others[i];
    parts.push_back(held_together(form_of_x(other.form) + " " + loss_words(view.reach(other.standing).cv_loss_rel)));
  }
  if (shown < line.others.size()) {
    const std::string dearest = loss_words(view.reach(line.others.back()->standing).cv_loss_rel);
    parts.push_back(held_together(std::to_string(line.others.size() - shown) + " more to " + dearest));
  }
  return joined(parts, ", ");
}

bool has_weights(const std::vector<Line>& lines) {
  return std::any_of(lines.begin(), lines.end(),
                     [](const Line& line) { return line.predictor->weight_share.has_value(); });
}

TextTable form_table(const View& view, const std::vector<Line>& lines) {
  const bool weights = has_weights(lines);
  std::vector<TableColumn> columns = {{"predictor"}, {"best as", false, 0, 1}, {"left out", true, 0, 1}};
  if (weights) columns.push_back({"weight", true, 0, 1});
  columns.push_back({"other forms", false, kLeastOthers, 2});
  TextTable table(columns);
  for (const Line& line : lines) {
    std::vector<Cell> cells = {{line.predictor->column}, {form_of_x(line.best->form)}, {left_out_words(view, line)}};
    if (weights) cells.push_back({share_words(line.predictor->weight_share)});
    cells.push_back({others_words(view, line)});
    table.add_row(std::move(cells));
  }
  return table;
}

// "exact over all 12,000,000 candidates", or how many were scored of how many.
std::string extent(const judge::Coverage& space) {
  if (space.scored == space.candidates) {
    return "exact over all " + grouped(space.candidates) + " candidates";
  }
  return "exact among the " + grouped(space.scored) + " candidates that were scored, of " + grouped(space.candidates);
}

// Under AIC and AICc a predictor without effect has about even odds for each of its forms against one of absence.
std::string weight_words(const View& view) {
  std::string words = " Weight: the share of Akaike weight, by " + view.criterion +
                      ", that candidates with the predictor have under all response forms";
  if (view.shortlist.summary.criterion != judge::Criterion::bic)
    words += "; pure noise reaches 0.7 easily, having several forms to be in by and one way to be out";
  return words + ".";
}

// Cuts the lines to those that a screen has room for; what the others are, in words.
std::string cut_to_dearest(std::vector<Line>& lines, const View& view) {
  if (view.whole || lines.size() <= kMostPredictors + 1) return {};
  const std::size_t hidden = lines.size() - kMostPredictors;
  const double dearest = view.cost_of(lines[kMostPredictors].left_out);
  lines.resize(kMostPredictors);
  const std::string text = "and " + counted(hidden, "predictor") + " more";
  return std::isfinite(dearest) ? text + " that cost at most " + percent(dearest) + " to leave out." : text + ".";
}

void form_costs(Page& page, const View& view) {
  std::vector<Line> lines = lines_of(view);
  if (lines.empty()) return;
  const std::string hidden = cut_to_dearest(lines, view);
  const std::string response = forms::term_name(view.shortlist.responses[view.response], view.shortlist.data.response);
  page.heading("What each form costs, for " + response);
  page.table(form_table(view, lines));
  if (!hidden.empty()) page.prose(hidden);
  page.prose(
      "x is the predictor. Cost in error: the best candidate with the form, or without the predictor, beside the best "
      "of all, cross-validated on the scale of " +
      response + "; " + extent(view.shortlist.space) + "." + (has_weights(lines) ? weight_words(view) : ""));
}

// The numbers of terms worth a line: as far as the error falls and a little beyond.
std::vector<const TermsStanding*> numbers_of_terms(const View& view) {
  std::vector<const TermsStanding*> all;
  std::size_t best_cv = 0, best_criterion = 0;
  const auto difference = [&](const TermsStanding* terms) {
    return view.reach(terms->standing).criterion_loss.value_or(std::numeric_limits<double>::infinity());
  };
  for (const TermsStanding& terms : view.shortlist.summary.by_terms) {
    if (!view.reach(terms.standing).cv_loss_rel) continue;
    all.push_back(&terms);
    if (cost(view.reach(terms.standing)) < cost(view.reach(all[best_cv]->standing))) best_cv = all.size() - 1;
    if (difference(&terms) < difference(all[best_criterion])) best_criterion = all.size() - 1;
  }
  if (view.whole || all.size() <= kMostNumbersOfTerms) return all;
  const std::size_t end = std::min(all.size(), std::max(best_cv, best_criterion) + 1 + kBeyondBest);
  const std::size_t first = end > kMostNumbersOfTerms ? end - kMostNumbersOfTerms : 0;
  return {all.begin() + static_cast<std::ptrdiff_t>(first), all.begin() + static_cast<std::ptrdiff_t>(end)};
}

void error_by_terms(Page& page, const View& view) {
  const std::vector<const TermsStanding*> numbers = numbers_of_terms(view);
  if (numbers.empty()) return;
  TextTable table({{"terms", true}, {"error", true, 0, 1}, {"Δ" + view.criterion, true, 0, 1}});
  for (const TermsStanding* terms : numbers) {
    const Reach& reach = view.reach(terms->standing);
    const bool best = reach.cv_loss_rel == 0.0;
    table.add_row({{std::to_string(terms->n_terms)},
                   {best ? "best" : loss_words(reach.cv_loss_rel), best ? Tone::strong : Tone::plain},
                   {reach.criterion_loss ? with_decimals(*reach.criterion_loss, 1) : "undefined"}});
  }
  page.heading("Error by number of terms, for " +
               forms::term_name(view.shortlist.responses[view.response], view.shortlist.data.response));
  page.table(table);
  page.prose("The best candidate with so many terms beside the best of all; Δ" + view.criterion +
             " from the lowest under any response form. All response forms, and the other numbers of terms, are in "
             "shortlist.json.");
}

std::optional<std::size_t> response_of(const Shortlist& shortlist, const judge::Candidate& chosen) {
  const auto found = std::find(shortlist.responses.begin(), shortlist.responses.end(), chosen.response);
  if (found == shortlist.responses.end()) return std::nullopt;
  return static_cast<std::size_t>(found - shortlist.responses.begin());
}

}  // namespace

void summary_tables(Page& page, const Shortlist& shortlist, const judge::Candidate& chosen, bool whole) {
  const std::optional<std::size_t> response = response_of(shortlist, chosen);
  if (shortlist.summary.empty() || !response) return;
  const View view{shortlist, *response, criterion_words(shortlist.summary.criterion), whole};
  form_costs(page, view);
  error_by_terms(page, view);
}

}  // namespace formsieve::cli

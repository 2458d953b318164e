#include "shortlist_view.hpp"

#include "numbers.hpp"
#include "page.hpp"
#include "proof_view.hpp"
#include "summary_view.hpp"
#include "text_table.hpp"
#include "words.hpp"

#include <algorithm>
#include <limits>

namespace formsieve::cli {
namespace {

using judge::Candidate;
using judge::Shortlist;

// Narrower screens get a paragraph a candidate; on screens with this much room beside the figures the terms stand in
// the same line.
constexpr std::size_t kNarrowestTable = 64;
constexpr std::size_t kRoomForTerms = 60;
constexpr std::size_t kLeastChecks = 14;
// Digits of the error that tell neighbours in a ranking apart.
constexpr int kErrorDigits = 4;

double criterion_value(const Candidate& candidate, judge::Criterion criterion) {
  switch (criterion) {
    case judge::Criterion::aicc:
      return candidate.likelihood.aicc;
    case judge::Criterion::bic:
      return candidate.likelihood.bic;
    default:
      return candidate.likelihood.aic;
  }
}

// AIC unless the plan ranks by a sibling of it.
judge::Criterion information_criterion(const Shortlist& shortlist) {
  return shortlist.criterion == judge::Criterion::cv_rmse ? judge::Criterion::aic : shortlist.criterion;
}

double lowest(const Shortlist& shortlist, judge::Criterion criterion) {
  double least = std::numeric_limits<double>::infinity();
  for (const Candidate& candidate : shortlist.candidates) {
    least = std::min(least, criterion_value(candidate, criterion));
  }
  return least;
}

int error_decimals(const Shortlist& shortlist) {
  int decimals = 0;
  bool found = false;
  for (const Candidate& candidate : shortlist.candidates) {
    if (!candidate.cv.rmse || *candidate.cv.rmse <= 0.0) continue;
    const int needed = decimals_for(*candidate.cv.rmse, kErrorDigits);
    decimals = found ? std::min(decimals, needed) : needed;
    found = true;
  }
  return decimals;
}

// The terms in full for the first line; for the others what differs from it, unless that takes longer to say.
std::string terms_text(const Candidate& candidate, const Candidate& first) {
  const std::string full = terms_sum(candidate);
  if (&candidate == &first) return full;
  const std::string number = std::to_string(first.rank);
  const std::string difference = terms_difference(candidate, first);
  const std::string relative = difference.empty() ? "the terms of " + number : "as " + number + ", " + difference;
  return display_width(relative) <= display_width(full) ? relative : full;
}

std::string failing_words(const Candidate& candidate) {
  const std::vector<std::string> failing = failing_assumptions(candidate);
  return failing.empty() ? "none" : joined(failing, ", ");
}

std::string coefficients_words(const Candidate& candidate) {
  return std::to_string(candidate.terms.size()) + " / " + std::to_string(candidate.coefficients.size());
}

struct Scale {
  int decimals;
  judge::Criterion criterion;
  double lowest;
};

std::string difference_words(const Candidate& candidate, const Scale& scale) {
  return with_decimals(criterion_value(candidate, scale.criterion) - scale.lowest, 1);
}

std::string r2_words(const Candidate& candidate) {
  return candidate.r2_own_units ? with_decimals(*candidate.r2_own_units, 3) : "undefined";
}

std::string marked(const Candidate& candidate, const std::string& text) {
  return candidate.marks.empty() ? text : joined(candidate.marks, ", ") + ": " + text;
}

// The line that shows a candidate as one of its family, where that is another line.
const Candidate* better_alike(const Shortlist& shortlist, const Candidate& candidate) {
  for (const Candidate& line : shortlist.candidates) {
    if (std::find(line.siblings.begin(), line.siblings.end(), candidate.number) != line.siblings.end()) return &line;
  }
  return nullptr;
}

// "+3 alike", "alike to 2", or nothing.
std::string family_words(const Shortlist& shortlist, const Candidate& candidate) {
  if (const Candidate* line = better_alike(shortlist, candidate)) return "alike to " + std::to_string(line->rank);
  return candidate.siblings.empty() ? "" : "+" + grouped(candidate.siblings.size()) + " alike";
}

std::string with_family(const Shortlist& shortlist, const Candidate& candidate, const std::string& text) {
  const std::string words = family_words(shortlist, candidate);
  return words.empty() ? text : text + " (" + words + ")";
}

// A dot before the rank of what no other line beats.
std::string rank_label(const Candidate& candidate) {
  return (candidate.pareto ? "• " : "") + std::to_string(candidate.rank);
}

TextTable wide_table(const Shortlist& shortlist, const Scale& scale, bool terms_inside) {
  std::vector<TableColumn> columns = {{"rank", true},
                                      {"response", false, 0, 1},
                                      {"CV RMSE ± se", true, 0, 1},
                                      {"Δ" + criterion_words(scale.criterion), true, 0, 1},
                                      {"terms / coef.", true, 0, 1},
                                      {"R²", true, 0, 1},
                                      {"checks failing", false, kLeastChecks, 1}};
  if (terms_inside) columns.push_back({"terms", false, kRoomForTerms, 1, true});
  TextTable table(columns);
  for (const Candidate& candidate : shortlist.candidates) {
    const std::string failing = failing_words(candidate);
    std::vector<Cell> cells = {{rank_label(candidate), candidate.marks.empty() ? Tone::plain : Tone::strong},
                               {response_label(candidate)},
                               {error_with_se(candidate.cv, scale.decimals)},
                               {difference_words(candidate, scale)},
                               {coefficients_words(candidate)},
                               {r2_words(candidate)},
                               {failing, failing == "none" ? Tone::plain : Tone::alarm}};
    const std::string sum = with_family(shortlist, candidate, terms_text(candidate, shortlist.candidates.front()));
    const std::string terms = marked(candidate, sum);
    const Tone tone = candidate.marks.empty() ? Tone::plain : Tone::strong;
    if (terms_inside) {
      cells.push_back({terms, tone});
      table.add_row(std::move(cells));
    } else {
      table.add_row(std::move(cells), {terms, tone});
    }
  }
  return table;
}

void stacked(Page& page, const Candidate& candidate, const Shortlist& shortlist, const Scale& scale) {
  std::string head = rank_label(candidate);
  if (!candidate.marks.empty()) head += ": " + joined(candidate.marks, ", ");
  page.heading(head);
  page.prose(response_label(candidate) + "; CV RMSE " + error_with_se(candidate.cv, scale.decimals));
  page.prose("Δ" + criterion_words(scale.criterion) + " " + difference_words(candidate, scale) + ", R² " +
             r2_words(candidate) + ", " + counted(candidate.terms.size(), "term") + ", " +
             counted(candidate.coefficients.size(), "coefficient"));
  page.prose("checks failing: " + failing_words(candidate));
  page.equation(with_family(shortlist, candidate, terms_text(candidate, shortlist.candidates.front())));
}

// What the dots and the brackets mean, where there are any.
void family_legend(Page& page, const Shortlist& shortlist) {
  const auto any = [&](auto&& holds) {
    return std::any_of(shortlist.candidates.begin(), shortlist.candidates.end(), holds);
  };
  if (any([](const Candidate& one) { return one.pareto; })) {
    page.prose("• no other line is as good by CV RMSE, number of terms and failing checks, and better by one of them.");
  }
  if (any([](const Candidate& one) { return !one.siblings.empty(); })) {
    page.prose("+ alike: so many candidates further down that predict nearly the same are shown by this line.");
  }
}

void ranking(Page& page, const Shortlist& shortlist) {
  const judge::Criterion criterion = information_criterion(shortlist);
  const Scale scale{error_decimals(shortlist), criterion, lowest(shortlist, criterion)};
  if (page.width() < kNarrowestTable) {
    for (const Candidate& candidate : shortlist.candidates) stacked(page, candidate, shortlist, scale);
    page.blank();
  } else {
    page.blank();
    const TextTable narrow = wide_table(shortlist, scale, false);
    const bool terms_inside = page.width() >= narrow.natural_width() + kRoomForTerms;
    page.table(terms_inside ? wide_table(shortlist, scale, true) : narrow);
  }
  const std::string name = criterion_words(criterion);
  page.prose("y is " + shortlist.data.response +
             "; CV RMSE and R² in its own units, held-out rows for the first, rows "
             "in use for the second; Δ" +
             name + " is the distance from the lowest " + name + " listed, comparable across response forms.");
  family_legend(page, shortlist);
}

void named_lines(Page& page, const Shortlist& shortlist) {
  bool headed = false;
  for (const Candidate& candidate : shortlist.candidates) {
    for (const std::string& mark : candidate.marks) {
      if (!headed) page.heading("The named lines");
      headed = true;
      constexpr std::size_t kLabelWidth = 16;
      page.labelled(mark + ", " + std::to_string(candidate.rank), kLabelWidth, mark_words(mark, shortlist));
    }
  }
}

const Candidate* recommended(const Shortlist& shortlist) {
  for (const Candidate& candidate : shortlist.candidates) {
    if (has_mark(candidate, "recommended")) return &candidate;
  }
  return shortlist.candidates.empty() ? nullptr : &shortlist.candidates.front();
}

void equation_of(Page& page, const Candidate& candidate) {
  const bool is_recommended = has_mark(candidate, "recommended");
  page.heading((is_recommended ? "The recommended equation (rank " : "The first equation (rank ") +
               std::to_string(candidate.rank) + ")");
  page.equation(candidate.equation);
  if (!candidate.back.formula.empty() && candidate.back.formula != candidate.equation) {
    page.prose("Its mean in own units, bias of the back-transformation corrected:");
    page.equation(candidate.back.formula);
  }
}

void sentences(Page& page, const std::string& heading, const std::vector<std::string>& texts) {
  if (texts.empty()) return;
  page.heading(heading);
  for (const std::string& text : texts) page.note(text);
}

std::string coverage(const judge::Coverage& space) {
  std::string text = grouped(space.candidates) + " candidates";
  text += space.scored == space.candidates ? ", every one scored" : ", " + grouped(space.scored) + " scored";
  if (!space.complete) text += " before the search was stopped";
  return text;
}

std::string setting(const Shortlist& shortlist) {
  const judge::DataSummary& data = shortlist.data;
  std::string rows = counted(data.rows_used, "row");
  if (data.rows_used != data.rows_read) rows = grouped(data.rows_used) + " of " + counted(data.rows_read, "row");
  std::string folds = counted(shortlist.folds.count, "fold") + " (" + shortlist.folds.kind + ")";
  if (shortlist.folds.repeats > 1) folds += ", dealt " + std::to_string(shortlist.folds.repeats) + " times";
  return data.response + " in " + data.file + ": " + rows + ", " + folds + ". " + coverage(shortlist.space) +
         ". Ranked by " + criterion_words(shortlist.criterion) + ".";
}

// What was looked at, what was not, and why.
std::vector<std::string> extent(const Shortlist& shortlist) {
  const judge::Coverage& space = shortlist.space;
  std::vector<std::string> said;
  if (!space.strategy_why.empty() && space.strategy != "every") said.push_back("Strategy: " + space.strategy_why + ".");
  if (!shortlist.data.dropped.empty()) {
    std::vector<std::string> parts;
    for (const auto& [column, rows] : shortlist.data.dropped) parts.push_back(grouped(rows) + " for " + column);
    said.push_back("Rows left out because a value is missing: " + joined(parts, ", ") + ".");
  }
  std::string examined = "Examined in full: " + grouped(space.examined);
  if (space.examined != space.pooled) examined += " of " + grouped(space.pooled) + " pooled";
  if (!space.pool_formed.empty()) examined += "; the pool is " + space.pool_formed;
  said.push_back(examined + ".");
  if (!space.pool_margin.empty()) said.push_back("Margin: " + space.pool_margin + ".");
  if (space.inseparable != "0") {
    said.push_back(grouped(space.inseparable) + " candidates were not entered: their columns cannot be told apart in " +
                   "some fold.");
  }
  const auto aside = [&](std::size_t count, const std::string& why) {
    if (count > 0) said.push_back(grouped(count) + " pooled candidates were set aside: " + why);
  };
  aside(space.set_aside_direction, "a fitted effect contradicts its declared direction.");
  aside(space.set_aside_require, "a required check fails.");
  if (!space.family_rule.empty()) said.push_back("Lines: " + space.family_rule + ".");
  return said;
}

}  // namespace

std::string error_with_se(const judge::CrossValidation& cv, int decimals) {
  if (!cv.rmse) return "undefined";
  const std::string rmse = with_decimals(*cv.rmse, decimals);
  return cv.rmse_se ? rmse + " ± " + with_decimals(*cv.rmse_se, decimals) : rmse;
}

std::string profile_page(const judge::Shortlist& shortlist, const Terminal& terminal) {
  Page page(terminal);
  page.prose(setting(shortlist));
  if (shortlist.summary.empty() && shortlist.proof.empty())
    page.prose("This run holds no profile of the space: it was written by an earlier version.");
  if (!shortlist.candidates.empty()) summary_tables(page, shortlist, *recommended(shortlist), true);
  proof_tables(page, shortlist, true);
  return page.text();
}

std::string shortlist_page(const judge::Shortlist& shortlist, const std::string& run_folder, const Terminal& terminal) {
  Page page(terminal);
  page.prose(setting(shortlist));
  if (shortlist.candidates.empty()) {
    page.prose("The shortlist is empty: no candidate could be examined.");
  } else {
    ranking(page, shortlist);
    equation_of(page, *recommended(shortlist));
    named_lines(page, shortlist);
    summary_tables(page, shortlist, *recommended(shortlist));
    proof_tables(page, shortlist, false);
  }
  sentences(page, "What the ranking shows", shortlist.remarks);
  sentences(page, "How far the search went", extent(shortlist));
  sentences(page, "To keep in mind", shortlist.cautions);
  page.blank();
  page.prose("Everything is in the run folder " + run_folder + ". One candidate in full:");
  const Candidate* one = recommended(shortlist);
  page.command("formsieve show " + shell_word(run_folder) + " " + std::to_string(one == nullptr ? 1 : one->rank));
  return page.text();
}

}  // namespace formsieve::cli

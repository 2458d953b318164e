#include "candidate_view.hpp"

#include "examination_view.hpp"
#include "numbers.hpp"
#include "page.hpp"
#include "shortlist_view.hpp"
#include "text_table.hpp"
#include "words.hpp"

#include <algorithm>
#include <cmath>

namespace formsieve::cli {
namespace {

using judge::Candidate;
using judge::Shortlist;

void title(Page& page, const Shortlist& shortlist, const Candidate& candidate) {
  std::string head = "Rank " + std::to_string(candidate.rank);
  if (!candidate.marks.empty()) head += ": " + joined(candidate.marks, ", ");
  page.heading(head);
  page.prose("Candidate " + grouped(candidate.number) + " of " + grouped(shortlist.space.candidates) + ", fitted to " +
             counted(candidate.n, "row") + " of " + shortlist.data.file + "; " +
             counted(candidate.terms.size(), "term") + ", " + counted(candidate.coefficients.size(), "coefficient") +
             ".");
  for (const std::string& mark : candidate.marks) page.note(mark + ": " + mark_words(mark, shortlist));
}

void equation(Page& page, const Candidate& candidate) {
  page.heading("The equation");
  page.equation(candidate.equation);
  if (is_identity(candidate.response)) {
    page.prose("The response enters as it is: nothing has to be transformed back.");
    return;
  }
  page.blank();
  page.prose("The mean in own units, bias of the back-transformation corrected (" + candidate.back.used + "):");
  page.equation(candidate.back.formula);
  page.prose(
      "Means are " + significant(candidate.back.smearing_factor) +
      " times what the equation gives when it is merely turned back; that uncorrected value estimates a median.");
}

std::string fold_range(const judge::CrossValidation& cv) {
  std::vector<double> errors;
  for (const double mse : cv.fold_mse) {
    if (std::isfinite(mse)) errors.push_back(std::sqrt(mse));
  }
  if (errors.size() < 2) return {};
  const auto [least, most] = std::minmax_element(errors.begin(), errors.end());
  return "RMSE from " + significant(*least) + " to " + significant(*most) + " over " + counted(errors.size(), "fold");
}

void prediction(Page& page, const Shortlist& shortlist, const Candidate& candidate) {
  const judge::CrossValidation& cv = candidate.cv;
  const std::string& response = candidate.response_column;
  page.heading("How well does it predict rows it has not seen?");
  const int decimals = cv.rmse ? decimals_for(*cv.rmse, kErrorDigits) : 0;
  page.labelled("RMSE", kLabelWidth,
                error_with_se(cv, decimals) + ", in units of " + response + "; chosen among " +
                    grouped(shortlist.space.candidates) + " on these rows, hence optimistic");
  if (cv.n_undefined > 0) {
    page.labelled("undefined", kLabelWidth,
                  counted(cv.n_undefined, "held-out prediction") + " cannot be turned back to own units");
  }
  if (!is_identity(candidate.response)) {
    page.labelled("RMSE uncorrected", kLabelWidth, optional_figure(cv.rmse_naive) + ", without the bias correction");
  }
  page.labelled("mean error", kLabelWidth, mean_error(cv.bias, cv.rmse) + ", predicted minus measured");
  page.labelled("absolute error", kLabelWidth,
                "mean " + optional_figure(cv.mae) + ", median " + optional_figure(cv.mae_median));
  const std::string folds = fold_range(cv);
  if (!folds.empty()) page.labelled("fold by fold", kLabelWidth, folds);
  if (!is_identity(candidate.response)) {
    page.labelled("on the form's scale", kLabelWidth,
                  "RMSE " + significant(cv.rmse_form_scale) + ", mean error " +
                      mean_error(cv.bias_form_scale, cv.rmse_form_scale) + ", of " +
                      forms::term_name(candidate.response, response));
  }
}

void rows_in_use(Page& page, const Candidate& candidate) {
  page.heading("How close is it to the rows in use?");
  std::string r2 = candidate.r2_own_units ? with_decimals(*candidate.r2_own_units, 4) : "undefined";
  r2 += " in own units";
  if (!is_identity(candidate.response)) {
    r2 += ", " + with_decimals(candidate.r2_form_scale, 4) + " on the scale of " +
          forms::term_name(candidate.response, candidate.response_column);
  }
  page.labelled("R²", kLabelWidth, r2);
  page.labelled("residual sd", kLabelWidth,
                significant(candidate.sigma) + ", on the scale of " +
                    forms::term_name(candidate.response, candidate.response_column));
  const fit::Likelihood& likelihood = candidate.likelihood;
  page.labelled("information criteria", kLabelWidth,
                "AIC " + with_decimals(likelihood.aic, 1) + ", AICc " + with_decimals(likelihood.aicc, 1) + ", BIC " +
                    with_decimals(likelihood.bic, 1));
  page.labelled("log-likelihood", kLabelWidth,
                with_decimals(likelihood.log_likelihood, 2) + " with " + counted(likelihood.n_parameters, "parameter") +
                    ", in own units (Jacobian included): comparable across response forms");
}

void coefficients(Page& page, const Candidate& candidate) {
  page.heading("What does each term contribute?");
  TextTable table({{"term"}, {"coefficient", true, 0, 1}, {"se", true, 0, 1}, {"robust se", true, 0, 1}});
  for (const fit::Coefficient& one : candidate.coefficients) {
    table.add_row({{one.term}, {significant(one.value, 5)}, {significant(one.se, 3)}, {significant(one.se_robust, 3)}});
  }
  page.table(table);
  page.prose(
      "Standard errors take the terms as given: they do not know of the search. The robust ones (HC3) allow for "
      "unequal "
      "spread. No p-values are given, since a search makes them far too small.");
}

std::string defined_words(const forms::Interval& interval) {
  const bool below = std::isfinite(interval.lower), above = std::isfinite(interval.upper);
  if (!below && !above) return "defined everywhere";
  const std::string lower = (interval.lower_closed ? "from " : "above ") + significant(interval.lower, 6);
  const std::string upper = (interval.upper_closed ? "to " : "below ") + significant(interval.upper, 6);
  if (!above) return "defined " + lower;
  if (!below)
    return "defined " + std::string(interval.upper_closed ? "up to " : "below ") + significant(interval.upper, 6);
  return "defined " + lower + " " + upper;
}

void ranges(Page& page, const Candidate& candidate) {
  if (candidate.ranges.empty()) return;
  page.heading("Where may it be used?");
  std::size_t label_width = 0;
  for (const judge::ValidRange& range : candidate.ranges) {
    label_width = std::max(label_width, display_width(range.column));
  }
  label_width = std::min(label_width, kLabelWidth);
  for (const judge::ValidRange& range : candidate.ranges) {
    const std::string text = range.levels.empty()
                                 ? "seen from " + significant(range.seen_min, 6) + " to " +
                                       significant(range.seen_max, 6) + "; form " + defined_words(range.defined)
                                 : "levels known: " + joined(range.levels, ", ");
    page.labelled(range.column, label_width, text);
  }
  page.prose("Outside the range that was seen a prediction is extrapolation.");
}

// What the checks' own section has said already is not said again.
bool repeats_a_check(const std::string& caution, const Candidate& candidate) {
  return std::any_of(candidate.checks.begin(), candidate.checks.end(), [&](const checks::Check& check) {
    return !check.passes && !check.size_words.empty() && caution.find(check.size_words) != std::string::npos;
  });
}

void cautions(Page& page, const Shortlist& shortlist, const Candidate& candidate) {
  if (candidate.cautions.empty() && shortlist.cautions.empty()) return;
  page.heading("What must be kept in mind?");
  for (const std::string& caution : candidate.cautions) {
    if (!repeats_a_check(caution, candidate)) page.note(caution);
  }
  for (const std::string& caution : shortlist.cautions) page.note(caution);
}

}  // namespace

std::string candidate_page(const judge::Shortlist& shortlist, const judge::Candidate& candidate,
                           const std::string& run_folder, const Terminal& terminal) {
  Page page(terminal);
  title(page, shortlist, candidate);
  equation(page, candidate);
  prediction(page, shortlist, candidate);
  show_intervals(page, candidate);
  rows_in_use(page, candidate);
  coefficients(page, candidate);
  show_effects(page, candidate);
  show_checks(page, candidate);
  show_influence(page, candidate);
  show_corrections(page, candidate);
  ranges(page, candidate);
  cautions(page, shortlist, candidate);
  page.blank();
  page.prose("The whole shortlist:");
  page.command("formsieve show " + shell_word(run_folder));
  return page.text();
}

}  // namespace formsieve::cli

#include "checks/bend.hpp"
#include "checks/words.hpp"

#include <algorithm>
#include <optional>

namespace formsieve::checks {

namespace {

/// Why there is nothing to test; empty when there may be.
std::string why_not(const Workings& workings) {
  if (!workings.untestable.empty()) return workings.untestable;
  if (workings.p < 2) return "no term, so one fitted value";
  if (!workings.of_the_fit().full_rank) return "the design columns are not separable";
  return {};
}

std::string gain_words(const Bend& bend) {
  return "would raise R² by " + number_words(bend.gain_r2) + " and lower the residual variance by " +
         number_words(100.0 * bend.gain_variance) + " %";
}

void set_sizes(const Bend& bend, Check& check) {
  check.size = bend.gain_r2;
  check.size2 = bend.gain_variance;
}

CheckPart part_of(const Bend& bend, std::string subject) {
  CheckPart part;
  part.subject = std::move(subject);
  if (!bend.tested()) return part;
  part.statistic = bend.f;
  part.p = bend.p;
  part.size = bend.gain_r2;
  return part;
}

}  // namespace

Check straightness(const Workings& workings) {
  Check check = named("straightness", "RESET (Ramsey), squares and cubes of the fitted value",
                      "the square and cube of the fitted value add nothing to the equation");
  check.size_words = "no bend to judge";
  check.size2 = 0.0;
  check.note = why_not(workings);
  if (!check.note.empty()) return check;
  const Bend bend = bend_along(workings, workings.subject.fitted);
  if (!bend.tested()) {
    check.note = bend.df1 == 0.0 ? "the design already holds every power of the fitted value"
                                 : "too few rows for two more columns";
    return check;
  }
  check.statistic = bend.f;
  check.df = bend.df1;
  check.df2 = bend.df2;
  check.p = bend.p;
  set_sizes(bend, check);
  check.size_words = "letting the curve bend further " + gain_words(bend);
  return check;
}

Check straightness_by_term(const Workings& workings) {
  Check check = named("straightness-by-term", "RESET term by term, smallest p times their number (Bonferroni)",
                      "the square and cube of no term add to the equation");
  check.size_words = "no bend to judge";
  check.size2 = 0.0;
  check.note = why_not(workings);
  if (!check.note.empty()) return check;
  const Eigen::VectorXd slopes = slopes_of(workings);
  std::optional<Bend> worst;
  double n_tested = 0.0;
  for (std::size_t term = 0; term < n_terms(workings); ++term) {
    const Bend bend = bend_along(workings, term_curve(workings, slopes, term));
    check.parts.push_back(part_of(bend, term_name(workings, term)));
    if (!bend.tested()) continue;
    ++n_tested;
    if (worst && worst->p <= bend.p) continue;
    worst = bend;
    check.size_words = "letting " + term_name(workings, term) + " bend further " + gain_words(bend);
  }
  if (!worst) {
    check.note = "too few rows, or terms that hold their own squares and cubes";
    return check;
  }
  check.statistic = worst->f;
  check.df = worst->df1;
  check.df2 = worst->df2;
  check.p = std::min(1.0, n_tested * worst->p);
  set_sizes(*worst, check);
  return check;
}

}  // namespace formsieve::checks

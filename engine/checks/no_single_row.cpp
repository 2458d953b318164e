#include "checks/leave_out.hpp"
#include "checks/words.hpp"

#include <cmath>

namespace formsieve::checks {

namespace {

void note_full_leverage(const Workings& workings, Check& check) {
  Eigen::Index row = 0;
  if (workings.subject.leverage.maxCoeff(&row) < kFullLeverage) return;
  check.verdict = Verdict::broken;
  check.note = row_words(workings.subject.lines, static_cast<std::size_t>(row)) +
               " has leverage 1: a coefficient rests on it alone";
}

/// The row farthest from the others' fit, with its Bonferroni p-value.
void test_outlier(const Workings& workings, Check& check) {
  const Subject& subject = workings.subject;
  if (!outlier_p(subject, 0.0)) {
    check.note = "too few rows for a p-value";
    return;
  }
  Eigen::Index row = 0;
  const Eigen::VectorXd studentised = externally_studentised(subject);
  studentised.cwiseAbs().maxCoeff(&row);
  check.statistic = std::abs(studentised[row]);
  check.df = static_cast<double>(workings.n - workings.p - 1);
  check.p = outlier_p(subject, studentised[row]);
  check.size_words += "; the farthest from the others is " + row_words(subject.lines, static_cast<std::size_t>(row));
}

}  // namespace

Check no_single_row(const Workings& workings) {
  Check check = named("no-single-row", "largest externally studentised residual, Bonferroni; distance of Cook",
                      "no single row lies off the equation of the others or decides it");
  check.size_words = "no residuals to judge";
  check.size2 = 0.0;
  const Subject& subject = workings.subject;
  if (!workings.untestable.empty()) {
    check.note = workings.untestable;
    return check;
  }
  if (!(subject.sigma > 0.0) || !subject.leverage.allFinite() || !workings.of_the_fit().full_rank) {
    check.note = "the fit has no residual spread or no leverages";
    return check;
  }
  Eigen::Index row = 0;
  check.size2 = cook_distances(subject).maxCoeff(&row);
  check.size = largest_prediction_change(workings, row);
  check.size_words = "leaving out " + row_words(subject.lines, static_cast<std::size_t>(row)) +
                     " moves a prediction by up to " + number_words(check.size) +
                     " residual standard deviations (distance of Cook " + number_words(*check.size2) + ")";
  test_outlier(workings, check);
  note_full_leverage(workings, check);
  return check;
}

}  // namespace formsieve::checks

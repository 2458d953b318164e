#include "checks/anderson_darling.hpp"
#include "checks/moments.hpp"
#include "checks/shapiro_wilk.hpp"
#include "checks/words.hpp"
#include "checks/workings.hpp"

namespace formsieve::checks {

namespace {

void test_by_shapiro_wilk(const Workings& workings, Check& check) {
  const auto test = shapiro_wilk(workings.residuals);
  if (!test) {
    check.note = "needs at least three rows and residuals of some spread";
    return;
  }
  check.statistic = test->w;
  check.p = test->p;
}

void test_by_anderson_darling(const Workings& workings, Check& check) {
  const auto test = anderson_darling(workings.residuals);
  if (!test) return;
  check.statistic = test->a2_adjusted;
  check.p = test->p;
  check.note = "so many rows show departures that do not matter: judge by the sizes";
}

}  // namespace

Check normal_residuals(const Workings& workings) {
  const bool many = workings.n > kMostShapiroRows;
  Check check =
      named("normal-residuals", many ? "Anderson–Darling, mean and spread estimated (Stephens)" : "Shapiro–Wilk",
            "the residuals come from a normal distribution");
  check.size2 = 0.0;
  if (!workings.untestable.empty()) {
    check.note = workings.untestable;
    check.size_words = "no residuals to judge";
    return check;
  }
  const Moments shape = moments(workings.residuals);
  check.size = shape.skewness;
  check.size2 = shape.excess_kurtosis;
  check.size_words = "residual skewness " + number_words(shape.skewness) + ", excess kurtosis " +
                     number_words(shape.excess_kurtosis) + " (both 0 for a normal distribution)";
  if (many)
    test_by_anderson_darling(workings, check);
  else
    test_by_shapiro_wilk(workings, check);
  note_weights(workings, check);
  return check;
}

}  // namespace formsieve::checks

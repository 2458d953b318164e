#include "announcement_view.hpp"

#include "numbers.hpp"
#include "page.hpp"

namespace formsieve::cli {

/// Below it duration() says "less than", which takes no "about".
constexpr double kShortestSaid = 0.05;

std::string announcement_text(const pipeline::Announcement& announcement, const Terminal& terminal) {
  Page page(terminal);
  std::string rows = counted(announcement.rows_used, "row");
  if (announcement.rows_used != announcement.rows_read) {
    rows = grouped(announcement.rows_used) + " of " + counted(announcement.rows_read, "row");
  }
  std::string folds = counted(announcement.folds, "fold");
  if (announcement.repeats > 1) folds += " dealt " + std::to_string(announcement.repeats) + " times";
  std::string time;
  if (announcement.seconds_estimate >= 0.0)
    time =
        (announcement.seconds_estimate < kShortestSaid ? "; " : "; about ") + duration(announcement.seconds_estimate);
  page.prose(grouped(announcement.candidates) + " candidates: " + counted(announcement.n_responses, "response form") +
             " × " + counted(announcement.n_predictors, "predictor") + " with " +
             counted(announcement.n_forms, "form") + "; " + rows + "; " + folds + time);
  if (announcement.seconds_estimate < 0.0) page.note(announcement.strategy);
  for (const std::string& note : announcement.notes) page.note(note);
  return page.text();
}

}  // namespace formsieve::cli

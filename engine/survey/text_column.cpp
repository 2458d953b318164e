#include <algorithm>
#include <numeric>

#include "survey/column_profile.hpp"
#include "survey/usable.hpp"
#include "survey/words.hpp"

namespace formsieve::survey {

namespace {

constexpr std::size_t kMostLevelsNamed = 6;  ///< in a note

/// Levels that occur, with their counts, the most frequent first.
void fill_levels(forms::ColumnFacts& facts, const table::Column& column) {
  const std::vector<std::size_t> counts = count_levels(column);
  std::vector<std::size_t> order(counts.size());
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::erase_if(order, [&](std::size_t level) { return counts[level] == 0; });
  std::stable_sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) { return counts[a] > counts[b]; });
  for (const std::size_t level : order) {
    facts.levels.push_back(column.levels[level]);
    facts.level_counts.push_back(counts[level]);
    facts.n += counts[level];
  }
  facts.n_distinct = order.size();
}

/// Fewer than two rare levels are not pooled: a pool of one is that level.
std::optional<std::string> pooling_note(const forms::ColumnFacts& facts, std::size_t rare_level_count) {
  std::vector<std::string> rare;
  for (std::size_t i = 0; i < facts.levels.size(); ++i)
    if (facts.level_counts[i] < rare_level_count) rare.push_back(facts.levels[i]);
  if (rare.size() < 2) return std::nullopt;
  return std::to_string(rare.size()) + " levels seen on fewer than " + std::to_string(rare_level_count) +
         " rows are pooled into one: " + listed(rare, kMostLevelsNamed) +
         " (the limit is common practice; data.rare_levels sets it)";
}

FormTrial indicators(const forms::MenuEntry& entry, const std::string& column) {
  FormTrial trial;
  trial.form = entry.form;
  trial.label = forms::term_name(entry.form, column);
  trial.possible = true;
  trial.suggested = true;
  trial.why = entry.why;
  return trial;
}

}  // namespace

ColumnProfile profile_text_column(const table::Column& column, std::size_t rare_level_count) {
  ColumnProfile profile;
  profile.facts.name = column.name;
  profile.facts.text = true;
  profile.direction = "none";
  profile.n_missing = column.n_missing;
  fill_levels(profile.facts, column);
  if (const auto reason = unusable_reason(column, rare_level_count)) {
    profile.set_aside = true;
    profile.notes.push_back(*reason);
    return profile;
  }
  for (const forms::MenuEntry& entry : forms::default_menu(profile.facts, rare_level_count).entries)
    profile.forms.push_back(indicators(entry, column.name));
  if (const auto note = pooling_note(profile.facts, rare_level_count)) profile.notes.push_back(*note);
  return profile;
}

}  // namespace formsieve::survey

#include "survey_view.hpp"

#include "numbers.hpp"
#include "page.hpp"
#include "text_table.hpp"
#include "words.hpp"

#include <algorithm>
#include <map>

namespace formsieve::cli {
namespace {

// Narrower screens get a paragraph a column instead of a table.
constexpr std::size_t kNarrowestTable = 56;
// Levels of a text column that are named before the rest is counted.
constexpr std::size_t kNamedLevels = 6;
// A menu of four forms on one line, and a list of levels that is more than a ladder of single words.
constexpr std::size_t kLeastMenu = 28, kLeastLevels = 24;

using Profile = survey::ColumnProfile;

std::vector<const Profile*> columns_of(const survey::Survey& survey, bool text) {
  std::vector<const Profile*> found;
  for (const Profile& profile : survey.columns) {
    if (profile.facts.text == text) found.push_back(&profile);
  }
  return found;
}

// The form with x for the column: the column's name stands at the head of the paragraph already.
std::string short_label(const survey::FormTrial& trial) { return forms::term_name(trial.form, "x"); }

std::string suggested_menu(const Profile& profile) {
  std::vector<std::string> labels;
  for (const survey::FormTrial& trial : profile.forms) {
    if (trial.suggested) labels.push_back(held_together(short_label(trial)));
  }
  if (!labels.empty()) return joined(labels, ", ");
  return profile.set_aside ? "set aside" : "–";
}

// Groups of figures that stay together.
constexpr std::size_t kCounts = 1, kQuantiles = 2, kShape = 3, kSuggested = 4;

// A column of the table: heading, group, figure of one profile. Counts that are zero throughout are not shown.
struct Figure {
  const char* heading;
  std::size_t group;
  std::string (*text)(const Profile&);
  std::size_t (*count)(const Profile&);  // null for figures that are always shown
};

const std::vector<Figure>& figures() {
  static const std::vector<Figure> kFigures = {
      {"n", kCounts, [](const Profile& p) { return grouped(p.facts.n); }, nullptr},
      {"missing", kCounts, [](const Profile& p) { return grouped(p.n_missing); },
       [](const Profile& p) { return p.n_missing; }},
      {"zeros", kCounts, [](const Profile& p) { return grouped(p.facts.n_zero); },
       [](const Profile& p) { return p.facts.n_zero; }},
      {"negative", kCounts, [](const Profile& p) { return grouped(p.facts.n_negative); },
       [](const Profile& p) { return p.facts.n_negative; }},
      {"smallest", kQuantiles, [](const Profile& p) { return significant(p.facts.min); }, nullptr},
      {"Q1", kQuantiles, [](const Profile& p) { return significant(p.q1); }, nullptr},
      {"median", kQuantiles, [](const Profile& p) { return significant(p.median); }, nullptr},
      {"Q3", kQuantiles, [](const Profile& p) { return significant(p.q3); }, nullptr},
      {"largest", kQuantiles, [](const Profile& p) { return significant(p.facts.max); }, nullptr},
      {"G1", kShape, [](const Profile& p) { return with_decimals(p.facts.skewness, 2); }, nullptr},
      {"skewness", kShape, skew_words, nullptr},
      {"outlying", kShape, [](const Profile& p) { return grouped(p.n_outlying); },
       [](const Profile& p) { return p.n_outlying; }},
      {"suggested forms", kSuggested, suggested_menu, nullptr}};
  return kFigures;
}

bool shown(const Figure& figure, const std::vector<const Profile*>& profiles) {
  return figure.count == nullptr || std::any_of(profiles.begin(), profiles.end(),
                                                [&](const Profile* profile) { return figure.count(*profile) > 0; });
}

bool is_words(const Figure& figure) {
  return figure.group == kSuggested || std::string_view(figure.heading) == "skewness";
}

TextTable numbers_table(const std::vector<const Profile*>& profiles, const std::vector<std::size_t>& group_order) {
  std::vector<TableColumn> columns = {{"column"}};
  std::vector<const Figure*> used;
  for (const std::size_t group : group_order) {
    for (const Figure& figure : figures()) {
      if (figure.group != group || !shown(figure, profiles)) continue;
      used.push_back(&figure);
      columns.push_back({figure.heading, !is_words(figure), figure.group == kSuggested ? kLeastMenu : 0, figure.group});
    }
  }
  TextTable table(columns);
  for (const Profile* profile : profiles) {
    std::vector<Cell> cells = {{profile->facts.name}};
    for (const Figure* figure : used) cells.push_back({figure->text(*profile)});
    table.add_row(std::move(cells));
  }
  return table;
}

// In reading order where one band holds all; otherwise counts and shape share the first band, which fills both.
TextTable numbers_table(const std::vector<const Profile*>& profiles, std::size_t width) {
  TextTable table = numbers_table(profiles, {kCounts, kQuantiles, kShape, kSuggested});
  if (table.natural_width() <= width) return table;
  return numbers_table(profiles, {kCounts, kShape, kQuantiles, kSuggested});
}

std::string absent_counts(const std::vector<const Profile*>& profiles) {
  std::vector<std::string> words;
  const std::map<std::string_view, const char*> kWords = {{"missing", "missing cells"},
                                                          {"zeros", "zeros"},
                                                          {"negative", "negative values"},
                                                          {"outlying", "outlying values"}};
  for (const Figure& figure : figures()) {
    if (!shown(figure, profiles)) words.push_back(kWords.at(figure.heading));
  }
  return words.empty() ? "" : "No column of numbers has " + joined(words, " or ") + ".";
}

std::string level_list(const Profile& profile) {
  std::vector<std::string> parts;
  const std::vector<std::string>& levels = profile.facts.levels;
  const std::size_t n_named = std::min(levels.size(), kNamedLevels);
  for (std::size_t i = 0; i < n_named; ++i) {
    std::string part = levels[i];
    if (i < profile.facts.level_counts.size()) part.append(" ").append(grouped(profile.facts.level_counts[i]));
    parts.push_back(std::move(part));
  }
  if (levels.size() > n_named) parts.push_back(grouped(levels.size() - n_named) + " more");
  return joined(parts, ", ");
}

TextTable texts_table(const std::vector<const Profile*>& profiles) {
  TextTable table({{"column of text"},
                   {"n", true, 0, 1},
                   {"missing", true, 0, 1},
                   {"levels", true, 0, 1},
                   {"the most frequent, with rows", false, kLeastLevels, 2}});
  for (const Profile* profile : profiles) {
    table.add_row({{profile->facts.name},
                   {grouped(profile->facts.n)},
                   {grouped(profile->n_missing)},
                   {grouped(profile->facts.levels.size())},
                   {level_list(*profile)}});
  }
  return table;
}

// What a table line says, as a paragraph.
void stacked(Page& page, const Profile& profile) {
  page.heading(profile.facts.name);
  const survey::ColumnProfile& p = profile;
  if (p.facts.text) {
    page.prose(counted(p.facts.n, "value") + ", " + grouped(p.n_missing) + " missing; " +
               counted(p.facts.levels.size(), "level") + ": " + level_list(p));
    return;
  }
  std::string counts = counted(p.facts.n, "value") + ", " + grouped(p.n_missing) + " missing";
  if (p.facts.n_zero > 0) counts += ", " + counted(p.facts.n_zero, "zero");
  if (p.facts.n_negative > 0) counts += ", " + grouped(p.facts.n_negative) + " negative";
  page.prose(counts);
  page.prose("from " + significant(p.facts.min) + " to " + significant(p.facts.max) + "; median " +
             significant(p.median) + ", quartiles " + significant(p.q1) + " and " + significant(p.q3));
  page.prose("skewness: " + skew_words(p) + " (G1 " + with_decimals(p.facts.skewness, 2) + "); " +
             grouped(p.n_outlying) + " outlying");
  page.prose("suggested: " + suggested_menu(p));
}

std::string with_skewness(const survey::FormTrial& trial) {
  const std::string label = short_label(trial);
  return trial.skewness_after ? label + " " + with_decimals(*trial.skewness_after, 2) : label;
}

// A form that is one with a simpler one is possible, but no choice of its own.
bool is_merged(const survey::FormTrial& trial) { return trial.possible && !trial.suggested && !trial.reason.empty(); }

std::string trials_of(const Profile& profile, bool suggested) {
  std::vector<std::string> parts;
  for (const survey::FormTrial& trial : profile.forms) {
    if (!trial.possible || trial.suggested != suggested || is_merged(trial)) continue;
    parts.push_back(held_together(with_skewness(trial)));
  }
  return joined(parts, " · ");
}

// The untransformed column is in every menu: saying so for each column would hide the other reasons.
std::string reason_for(const survey::FormTrial& trial) {
  const bool untransformed = trial.form.kind == forms::Kind::identity && !trial.form.reflect;
  return trial.suggested && !untransformed ? trial.why : std::string();
}

std::string reason_merged(const survey::FormTrial& trial) { return is_merged(trial) ? trial.reason : std::string(); }

std::string reason_against(const survey::FormTrial& trial) {
  if (trial.possible) return {};
  return trial.repair.empty() ? trial.reason : trial.reason + "; " + trial.repair;
}

// Forms that share a reason are named together.
void reasons(Page& page, const Profile& profile, std::string_view label, std::size_t label_width,
             std::string (*reason_of)(const survey::FormTrial&)) {
  std::vector<std::pair<std::string, std::vector<std::string>>> by_reason;
  for (const survey::FormTrial& trial : profile.forms) {
    const std::string reason = reason_of(trial);
    if (reason.empty()) continue;
    auto found = std::find_if(by_reason.begin(), by_reason.end(), [&](const auto& one) { return one.first == reason; });
    if (found == by_reason.end()) found = by_reason.insert(by_reason.end(), {reason, {}});
    found->second.push_back(held_together(short_label(trial)));
  }
  for (const auto& [reason, labels] : by_reason) {
    page.labelled(label, label_width, joined(labels, ", ") + ": " + reason);
  }
}

void forms_of(Page& page, const Profile& profile) {
  constexpr std::size_t kLabelWidth = 13;
  std::string head = profile.facts.name;
  if (profile.set_aside) head += ": set aside";
  page.heading(head);
  if (!profile.facts.text && !profile.set_aside) {
    std::string shape = "excess kurtosis " + with_decimals(profile.excess_kurtosis, 2) + ", medcouple " +
                        with_decimals(profile.medcouple, 2);
    if (profile.box_cox_lambda) shape += ", Box–Cox power " + with_decimals(*profile.box_cox_lambda, 2);
    page.labelled("shape", kLabelWidth, shape);
  }
  const std::string suggested = trials_of(profile, true), others = trials_of(profile, false);
  if (!suggested.empty()) page.labelled("suggested", kLabelWidth, suggested);
  if (!others.empty()) page.labelled("also possible", kLabelWidth, others);
  reasons(page, profile, "why", kLabelWidth, reason_for);
  reasons(page, profile, "merged", kLabelWidth, reason_merged);
  reasons(page, profile, "not possible", kLabelWidth, reason_against);
  for (const std::string& note : profile.notes) page.labelled("note", kLabelWidth, note);
}

std::string summary(const survey::Survey& survey) {
  const std::size_t n_texts = columns_of(survey, true).size();
  const std::size_t n_numbers = survey.columns.size() - n_texts;
  std::string text =
      survey.file + ": " + counted(survey.n_rows, "row") + "; " + counted(n_numbers, "column") + " of numbers";
  if (n_texts > 0) text += ", " + grouped(n_texts) + " of text";
  return text + ".";
}

void overview(Page& page, const survey::Survey& survey) {
  if (page.width() < kNarrowestTable) {
    for (const Profile& profile : survey.columns) stacked(page, profile);
    return;
  }
  const std::vector<const Profile*> numbers = columns_of(survey, false), texts = columns_of(survey, true);
  if (!numbers.empty()) {
    page.blank();
    page.table(numbers_table(numbers, page.width()));
    const std::string absent = absent_counts(numbers);
    if (!absent.empty()) page.prose(absent);
  }
  if (!texts.empty()) {
    page.blank();
    page.table(texts_table(texts));
    page.prose("Levels on fewer than " + counted(survey.rare_level_count, "row") + " are pooled into one.");
  }
}

}  // namespace

std::string survey_page(const survey::Survey& survey, const Terminal& terminal) {
  Page page(terminal);
  page.prose(summary(survey));
  overview(page, survey);
  page.heading("What each form does");
  page.prose(
      "Skewness G1 after each form; x is the column. The classes of skewness (mild from 0.5, moderate from 1, severe "
      "from 2) and the suggestions are common practice: they fill a menu, and the search decides.");
  for (const Profile& profile : survey.columns) forms_of(page, profile);
  return page.text();
}

}  // namespace formsieve::cli

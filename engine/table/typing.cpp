#include "table/typing.hpp"

#include "table/number.hpp"
#include "table/quoting.hpp"

#include <algorithm>
#include <set>

namespace formsieve::table {

namespace {

/// Different odd values that a proposed list of missing markers takes up; beyond these it would not be read.
constexpr std::size_t kProposedMarkers = 8;

/// Counts of a column's values by what they are.
struct Tally {
  std::size_t n_figures = 0;        ///< numbers, plain or not
  std::size_t n_words = 0;          ///< different texts that are no figures
  std::size_t n_number_levels = 0;  ///< different plain numbers among the texts
};

std::string_view trim(std::string_view text) { return Syntax(',', '.').trim(text); }

NumberKind classify(std::string_view text, char decimal) {
  const std::string_view trimmed = trim(text);
  return trimmed.empty() ? NumberKind::text : classify_number(trimmed, decimal);
}

void note_odd(Judgement& judgement, const LevelIndex::Level& level) {
  if (judgement.n_odd_cells == 0) judgement.first_odd_row = level.first_row;
  judgement.n_odd_cells += level.count;
  judgement.odd_values.emplace_back(level.text);
}

/// Goes through the texts of a column; fills the odd values of `judgement` and its count of numbers.
Tally tally_texts(const RawColumn& column, char decimal, Judgement& judgement) {
  Tally tally;
  for (const LevelIndex::Level& level : column.texts.levels()) {
    const NumberKind kind = classify(level.text, decimal);
    if (kind != NumberKind::text) tally.n_figures += level.count;
    if (kind == NumberKind::number) {
      judgement.n_numbers += level.count;
      ++tally.n_number_levels;
    } else {
      note_odd(judgement, level);
      tally.n_words += kind == NumberKind::text ? 1 : 0;
    }
  }
  return tally;
}

bool has_many_numbers(const RawColumn& column, const Tally& tally) {
  if (column.read_as == ReadAs::text) return tally.n_number_levels >= kManyNumbers;
  std::set<double> different;
  for (const double x : column.numbers) {
    if (!std::isnan(x)) different.insert(x);
    if (different.size() >= kManyNumbers) return true;
  }
  return false;
}

/// What is odd about a value that is no number, as a sentence's object.
std::string describe_kind(NumberKind kind, char decimal) {
  switch (kind) {
    case NumberKind::grouped:
      return "is written with thousands separators";
    case NumberKind::other_mark:
      return decimal == '.' ? "has a decimal comma, while the decimal mark of the file is the point"
                            : "has a decimal point, while the decimal mark of the file is the comma";
    case NumberKind::too_large:
      return "is beyond the largest number that can be computed with (about 1.8e308)";
    case NumberKind::not_finite:
      return "is not a finite number";
    case NumberKind::percent:
      return "has a percent sign";
    case NumberKind::special_sign:
      return "has a typographic minus sign instead of a plain '-'";
    case NumberKind::odd_space:
      return "has a no-break or other special space beside the number";
    case NumberKind::currency:
      return "has a currency sign";
    case NumberKind::number:
    case NumberKind::text:
      break;
  }
  return "is not a number";
}

/// How to mend values of this kind at their source; empty for plain texts.
std::string mend_at_source(NumberKind kind, char decimal) {
  switch (kind) {
    case NumberKind::grouped:
      return "Write the numbers without thousands separators, which are not guessed at";
    case NumberKind::other_mark:
      return std::string("Use one decimal mark throughout, or say which it is: data.decimal = ") +
             (decimal == '.' ? "\"comma\"" : "\"point\"");
    case NumberKind::percent:
    case NumberKind::currency:
      return "Write the bare numbers, and the unit in the name of the column";
    case NumberKind::special_sign:
      return "Write the minus as '-'";
    case NumberKind::odd_space:
      return "Remove the special spaces";
    default:
      return {};
  }
}

std::string proposed_missing(const Judgement& judgement, std::span<const std::string> missing) {
  std::vector<std::string> markers(missing.begin(), missing.end());
  for (const std::string& value : judgement.odd_values) {
    if (markers.size() == missing.size() + kProposedMarkers) break;
    const std::string marker(trim(value));
    if (std::find(markers.begin(), markers.end(), marker) == markers.end()) markers.push_back(marker);
  }
  return "data.missing = " + toml_list(markers);
}

}  // namespace

Judgement judge_column(const RawColumn& column, char decimal) {
  Judgement judgement;
  Tally tally = tally_texts(column, decimal, judgement);
  if (column.read_as == ReadAs::number) {
    const std::size_t n_parsed = column.numbers.size() - column.n_missing - judgement.n_odd_cells;
    judgement.n_numbers += n_parsed;
    tally.n_figures += n_parsed;
  }
  judgement.n_values = judgement.n_numbers + judgement.n_odd_cells;
  if (judgement.n_odd_cells == 0) return judgement;
  const bool is_mostly_figures = 2 * tally.n_figures >= judgement.n_values;
  const bool is_few_words = tally.n_words <= kFewWords && has_many_numbers(column, tally);
  judgement.verdict = is_mostly_figures || is_few_words ? Verdict::in_doubt : Verdict::text;
  return judgement;
}

Error describe_odd_cell(const Judgement& judgement, const std::string& where, const std::string& name, char decimal,
                        std::span<const std::string> missing) {
  const std::string& cell = judgement.odd_values.front();
  const NumberKind kind = classify(cell, decimal);
  std::string message = (cell.empty() ? "an empty cell" : show(cell)) + " " + describe_kind(kind, decimal);
  if (judgement.n_numbers > 0)
    message += "; " + std::to_string(judgement.n_numbers) + " of the " + std::to_string(judgement.n_values) +
               " values in this column " + (judgement.n_numbers == 1 ? "is a number" : "are numbers");

  std::string hint = mend_at_source(kind, decimal);
  const std::string as_text = "data.text = " + toml_list(std::vector{name});
  if (hint.empty()) {
    hint = "Correct the cell, or treat it as missing: " + proposed_missing(judgement, missing);
  }
  hint += "; or, if the column holds no quantities, take it as text: " + as_text;
  return {ErrorKind::data, std::move(message), where, std::move(hint)};
}

Error describe_stray_cell(const std::string& cell, const std::string& where, char decimal,
                          std::span<const std::string> missing) {
  const NumberKind kind = classify(cell, decimal);
  Judgement judgement;
  judgement.odd_values = {cell};
  std::string hint = mend_at_source(kind, decimal);
  if (hint.empty()) hint = "Correct the cell, or treat it as missing: " + proposed_missing(judgement, missing);
  return {ErrorKind::data, (cell.empty() ? "an empty cell" : show(cell)) + " " + describe_kind(kind, decimal), where,
          std::move(hint)};
}

}  // namespace formsieve::table

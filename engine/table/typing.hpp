// Whether a column is numeric or text, and when that is for the user to say.
#pragma once

#include "table/columns.hpp"

#include <cstddef>
#include <span>
#include <string>
#include <string_view>
#include <vector>

namespace formsieve::table {

/// What a column's values show it to be.
enum class Verdict {
  numeric,   ///< every value is a number (or there are none)
  text,      ///< plainly text
  in_doubt,  ///< mostly numbers, yet not all: an error, since either reading may be wrong
};

/// A column is in doubt when it holds values that are no numbers and
/// (a) at least half of its values are figures: numbers, or numbers written in a way that is not guessed at; or
/// (b) it holds at most `kFewWords` different texts beside at least `kManyNumbers` different numbers, however often the
///     texts occur: a word for "no value" that is not among the missing markers.
/// A column without any number is text. Half rather than nearly all, and no least number of rows: taking a broken
/// numeric column for text spoils an analysis unseen, while a question costs one setting.
inline constexpr std::size_t kFewWords = 3;
inline constexpr std::size_t kManyNumbers = 10;

struct Judgement {
  Verdict verdict = Verdict::numeric;
  std::size_t n_values = 0;             ///< cells that are not missing
  std::size_t n_numbers = 0;            ///< of these, plain numbers
  std::vector<std::string> odd_values;  ///< different values that are no numbers, by first appearance
  std::size_t n_odd_cells = 0;
  std::size_t first_odd_row = 0;
};

/// Judges a column as it was read. Cost: O(its different texts), plus O(rows) in rare cases.
Judgement judge_column(const RawColumn& column, char decimal);

/// The error for a cell in a column in doubt: `cell` at `where`, in column `name` of a file; `missing` are the markers
/// in force and `decimal` the mark that the file was read with.
Error describe_odd_cell(const Judgement& judgement, const std::string& where, const std::string& name, char decimal,
                        std::span<const std::string> missing);

/// The error for a cell that is no number in a column that must hold numbers, whatever else it holds.
Error describe_stray_cell(const std::string& cell, const std::string& where, char decimal,
                          std::span<const std::string> missing);

}  // namespace formsieve::table

#include "pipeline/leave_out.hpp"

#include "base/parallel.hpp"
#include "judge/judge.hpp"
#include "judge/words.hpp"
#include "pipeline/examine.hpp"
#include "pipeline/penalties.hpp"

#include <algorithm>
#include <limits>
#include <optional>

namespace formsieve::pipeline {

namespace {

template <class Values>
void erase_at(Values& values, std::size_t index) {
  if (index < values.size()) values.erase(values.begin() + static_cast<std::ptrdiff_t>(index));
}

bool is_alone_in_a_fold(const design::Folds& folds, std::size_t row) {
  return std::any_of(folds.fold_of.begin(), folds.fold_of.end(), [row](const std::vector<std::uint32_t>& fold_of) {
    return std::count(fold_of.begin(), fold_of.end(), fold_of[row]) == 1;
  });
}

/// The first by rank of the lowest; unset where no candidate has a score.
std::optional<std::size_t> leader(const Prepared& without, judge::Criterion criterion, const ChoiceByNumber& choices,
                                  const std::vector<judge::Candidate>& listed, unsigned threads) {
  const Examiner examiner(without);
  std::vector<double> value(listed.size(), std::numeric_limits<double>::infinity());
  base::parallel_for(listed.size(), threads, [&](std::size_t i) {
    const Examined scored = examiner.score(choices.at(listed[i].number), search::BigCount(listed[i].number));
    if (scored.candidate) value[i] = judge::criterion_value(*scored.candidate, criterion);
  });
  const auto lowest = std::min_element(value.begin(), value.end());
  if (lowest == value.end() || !(*lowest < std::numeric_limits<double>::infinity())) return std::nullopt;
  return listed[static_cast<std::size_t>(lowest - value.begin())].rank;
}

void set_leader(std::vector<judge::Candidate>& listed, std::size_t row, std::size_t rank) {
  for (judge::Candidate& candidate : listed)
    for (checks::InfluentialRow& one : candidate.influence.rows)
      if (one.row == row) one.leader_without = rank;
}

}  // namespace

Prepared without_row(const Prepared& prepared, std::size_t row) {
  Prepared without = prepared;
  design::Data& data = without.data;
  erase_at(data.response, row);
  erase_at(data.weights, row);
  erase_at(data.table_row, row);
  for (design::Predictor& predictor : data.predictors) erase_at(predictor.raw, row);
  --data.n_rows;
  for (auto& fold_of : without.folds.fold_of) erase_at(fold_of, row);
  std::erase(without.order, row);
  for (std::size_t& place : without.order)
    if (place > row) --place;
  return without;
}

std::vector<std::string> find_leaders_without_rows(const Prepared& prepared, const run::Plan& plan,
                                                   const ChoiceByNumber& choices, std::vector<judge::Candidate>& listed,
                                                   unsigned threads) {
  std::vector<std::string> said;
  if (listed.empty() || prepared.data.n_rows > kMostRowsForLeavingOut) return said;
  const std::vector<checks::InfluentialRow> rows = listed.front().influence.rows;
  for (const checks::InfluentialRow& one : rows) {
    if (is_alone_in_a_fold(prepared.folds, one.row)) continue;
    const auto rank = leader(without_row(prepared, one.row), criterion_of(plan.rank.by), choices, listed, threads);
    if (!rank) continue;
    set_leader(listed, one.row, *rank);
    if (*rank != listed.front().rank)
      said.push_back("Without line " + judge::grouped_digits(std::to_string(one.line)) + " rank " +
                     std::to_string(*rank) + " would lead the shortlist.");
  }
  return said;
}

}  // namespace formsieve::pipeline

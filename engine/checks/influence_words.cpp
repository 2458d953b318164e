#include "checks/deletion.hpp"
#include "checks/influence.hpp"
#include "checks/words.hpp"

#include <cmath>

namespace formsieve::checks {

namespace {

/// Below this change of every prediction and every coefficient a row is not worth a sentence.
constexpr double kWorthSaying = 0.5;

std::string name_of(const InfluentialRow& row) {
  return row.line > 0 ? "line " + std::to_string(row.line) : row_words({}, row.row);
}

std::string capitalised(std::string text) {
  if (!text.empty() && text[0] >= 'a' && text[0] <= 'z') text[0] = static_cast<char>(text[0] - 'a' + 'A');
  return text;
}

std::string se_words(double value) {
  return number_words(value) + (std::abs(value) == 1.0 ? " standard error" : " standard errors");
}

std::string p_words(double p) {
  constexpr double kSmallest = 1e-4;
  return p < kSmallest ? "p below 0.0001" : "p " + number_words(p);
}

std::string coefficient_words(const std::string& term) {
  return term == "intercept" ? "the intercept" : "the coefficient of " + term;
}

/// What leaving the row out does.
std::string effect_sentence(const InfluentialRow& row) {
  std::string sentence = capitalised("leaving out " + name_of(row)) + " moves a prediction by up to " +
                         number_words(row.prediction_sd) + " residual standard deviations";
  if (!row.moved_term.empty())
    sentence += " and " + coefficient_words(row.moved_term) + " by " + se_words(row.moved_se);
  return sentence + " (leverage " + number_words(row.leverage) + ", distance of Cook " + number_words(row.cook) + ").";
}

void say_row(const InfluentialRow& row, double average, std::vector<std::string>& said) {
  if (row.leverage >= kFullLeverage) {
    std::string rests = row.moved_term.empty() ? "a coefficient" : coefficient_words(row.moved_term);
    said.push_back(capitalised(name_of(row)) + " has leverage 1: " + rests + " rests on it alone.");
    return;
  }
  if (row.prediction_sd >= kWorthSaying || std::abs(row.moved_se) >= kWorthSaying) said.push_back(effect_sentence(row));
  if (row.p_bonferroni < kLevel)
    said.push_back(capitalised(name_of(row)) +
                   " lies off the equation of the other rows: " + number_words(std::abs(row.studentised)) +
                   " residual standard deviations (" + p_words(row.p_bonferroni) + " for the largest of all).");
  if (is_far(row.leverage, average) && row.prediction_sd < kWorthSaying)
    said.push_back(capitalised(name_of(row)) + " lies far from the others in the predictors (leverage " +
                   number_words(row.leverage) + ", " + number_words(row.leverage / average) +
                   " times the average) but agrees with them.");
}

void say_robust(const Influence& influence, const std::string& method, std::vector<std::string>& said) {
  if (influence.robust.empty()) return;
  std::string moved;
  for (const auto& coefficient : influence.robust)
    if (std::abs(coefficient.shift_se) > kNotableShift)
      moved += (moved.empty() ? "" : ", ") + coefficient.term + " by " + se_words(coefficient.shift_se);
  const std::string fit = "A fit that a few rows cannot move (" + method + ") gives " +
                          std::to_string(influence.n_downweighted) +
                          (influence.n_downweighted == 1 ? " row" : " rows") + " less than half of their weight and ";
  said.push_back(moved.empty() ? fit + "moves no coefficient by more than a standard error."
                               : fit + "moves " + moved + ": so much of them rests on a handful of rows.");
}

}  // namespace

std::vector<std::string> influence_words(const Influence& influence, std::size_t n, std::size_t p,
                                         const std::string& method) {
  std::vector<std::string> said;
  const double average = static_cast<double>(p) / static_cast<double>(n);
  for (const auto& row : influence.rows) say_row(row, average, said);
  if (said.empty() && !influence.rows.empty()) {
    const auto& first = influence.rows.front();
    said.push_back("No single row matters: leaving out " + name_of(first) +
                   ", the most influential, moves no prediction by more than " + number_words(first.prediction_sd) +
                   " residual standard deviations.");
  }
  say_robust(influence, method, said);
  return said;
}

}  // namespace formsieve::checks

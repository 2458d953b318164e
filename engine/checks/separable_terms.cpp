#include "checks/separable_terms.hpp"

#include "checks/condition.hpp"
#include "checks/words.hpp"

#include <Eigen/Cholesky>

#include <algorithm>
#include <cmath>

namespace formsieve::checks {

namespace {

double log_determinant(const Eigen::MatrixXd& positive_definite) {
  const Eigen::MatrixXd factor = positive_definite.llt().matrixL();
  return 2.0 * factor.diagonal().array().log().sum();
}

double inflation(const Basis& basis, const Eigen::MatrixXd& inverse_r, Eigen::Index first, Eigen::Index columns) {
  const auto block = basis.r.middleCols(first, columns);
  const auto inverse_rows = inverse_r.middleRows(first, columns);
  if (columns == 1) return block.squaredNorm() * inverse_rows.squaredNorm();
  const double log_gvif =
      log_determinant(block.transpose() * block) + log_determinant(inverse_rows * inverse_rows.transpose());
  return std::exp(log_gvif / static_cast<double>(columns));
}

std::string size_sentence(const Workings& workings, double largest, std::size_t term, double condition_number) {
  return "the other terms inflate the variance of " + term_name(workings, term) + " " + number_words(largest) +
         " times; condition number with the intercept " + number_words(condition_number);
}

/// "ln(area), volume": the terms of the columns, each once.
std::string terms_of(const Workings& workings, const std::vector<Eigen::Index>& columns) {
  std::string names;
  for (std::size_t term = 0; term < n_terms(workings); ++term) {
    const TermColumns range = columns_of(workings, term);
    if (std::none_of(columns.begin(), columns.end(), [&](auto j) { return j >= range.first && j < range.end; }))
      continue;
    names += (names.empty() ? "" : ", ") + term_name(workings, term);
  }
  return names;
}

}  // namespace

std::vector<double> inflations(const Basis& basis, std::span<const std::size_t> term_first) {
  const Eigen::Index k = basis.r.cols();
  const Eigen::MatrixXd inverse_r = basis.r.triangularView<Eigen::Upper>().solve(Eigen::MatrixXd::Identity(k, k));
  std::vector<double> result;
  for (std::size_t j = 0; j < term_first.size(); ++j) {
    const Eigen::Index first = static_cast<Eigen::Index>(term_first[j]) - 1;
    const Eigen::Index end = j + 1 < term_first.size() ? static_cast<Eigen::Index>(term_first[j + 1]) - 1 : k;
    // at least 1 by algebra (Fischer's inequality)
    result.push_back(std::max(1.0, inflation(basis, inverse_r, first, end - first)));
  }
  return result;
}

Check separable_terms(const Workings& workings) {
  Check check = named("separable-terms",
                      workings.weighted() ? "largest variance inflation of a term, weighted (Fox & Monette)"
                                          : "largest variance inflation of a term (Fox & Monette)",
                      "no term is nearly a combination of the others (limits, no test)");
  check.size = 1.0;
  check.size2 = 1.0;
  check.size_words = "fewer than two terms, so nothing to tell apart";
  if (n_terms(workings) < 2) {
    check.statistic = 1.0;
    return check;
  }
  const Basis& basis = workings.of_the_fit();
  if (!basis.full_rank) {
    check.note = "too few rows, or columns that are combinations of others";
    return check;
  }
  const auto all = inflations(basis, workings.subject.term_first);
  for (std::size_t term = 0; term < all.size(); ++term)
    check.parts.push_back({term_name(workings, term), all[term], std::nullopt, all[term]});
  const auto largest = std::max_element(all.begin(), all.end());
  const Condition found = condition(basis);
  check.statistic = *largest;
  check.size = *largest;
  check.size2 = found.index[workings.p - 1];
  check.size_words = size_sentence(workings, *largest, static_cast<std::size_t>(largest - all.begin()), *check.size2);
  if (const auto columns = entangled_columns(found); !columns.empty())
    check.note = "nearly dependent together (Belsley, Kuh & Welsch): " + terms_of(workings, columns);
  return check;
}

}  // namespace formsieve::checks

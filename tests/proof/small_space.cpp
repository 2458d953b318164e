#include "small_space.hpp"

#include "simulated.hpp"

#include <Eigen/Core>
#include <Eigen/QR>

#include <algorithm>
#include <cmath>
#include <limits>
#include <random>

namespace formsieve::test {

namespace {

using Random = std::mt19937_64;
using Real = long double;

double uniform(Random& random) { return (static_cast<double>(random() >> 11U) + 0.5) * 0x1p-53; }
std::size_t below(Random& random, std::size_t n) {
  return static_cast<std::size_t>(uniform(random) * static_cast<double>(n));
}
bool chance(Random& random, double p) { return uniform(random) < p; }
double normal(Random& random) {
  return std::sqrt(-2.0 * std::log(uniform(random))) * std::cos(6.283185307179586 * uniform(random));
}

/// Columns are appended one by one.
struct Rows {
  std::vector<Eigen::VectorXd> columns;
  Eigen::VectorXd weights;
};

Eigen::VectorXd form_of(const Eigen::VectorXd& x, std::size_t form) {
  switch (form) {
    case 0:
      return x;
    case 1:
      return x.array().log();
    case 2:
      return x.array().sqrt();
    case 3:
      return x.array().inverse();
    default:
      return x.array().square();
  }
}

/// Orthonormal columns of the same span, in the weighted sense, centred.
void append_block(Eigen::MatrixXd block, Rows& rows) {
  const Eigen::VectorXd root = rows.weights.cwiseSqrt();
  block.rowwise() -= (rows.weights.transpose() * block / rows.weights.sum()).eval();
  const Eigen::HouseholderQR<Eigen::MatrixXd> qr(root.asDiagonal() * block);
  const Eigen::MatrixXd q = qr.householderQ() * Eigen::MatrixXd::Identity(block.rows(), block.cols());
  for (Eigen::Index c = 0; c < block.cols(); ++c) rows.columns.emplace_back(q.col(c).cwiseQuotient(root));
}

search::FormBlock append_form(Random& random, const Eigen::VectorXd& x, std::size_t form, Rows& rows) {
  const std::size_t first = rows.columns.size();
  if (form < 5) {
    rows.columns.push_back(form_of(x, form));
  } else if (form == 5) {
    Eigen::MatrixXd block(x.size(), 2);
    block << x, x.cwiseAbs2();
    append_block(block, rows);
  } else {  // indicators of three levels besides the first
    Eigen::MatrixXd block = Eigen::MatrixXd::Zero(x.size(), 3);
    for (Eigen::Index i = 0; i < x.size(); ++i) {
      const std::size_t level = i < 4 ? static_cast<std::size_t>(i) : below(random, 4);
      if (level > 0) block(i, static_cast<Eigen::Index>(level) - 1) = 1.0;
    }
    append_block(block, rows);
  }
  return {first, rows.columns.size() - first};
}

std::vector<double> gram_of(const Rows& rows, const std::vector<Eigen::VectorXd>& responses) {
  std::vector<Eigen::VectorXd> all = rows.columns;
  all.insert(all.end(), responses.begin(), responses.end());
  for (Eigen::VectorXd& column : all) column.array() -= rows.weights.dot(column) / rows.weights.sum();
  std::vector<double> gram;
  for (const Eigen::VectorXd& a : all)
    for (const Eigen::VectorXd& b : all) gram.push_back(a.cwiseProduct(rows.weights).dot(b));
  return gram;
}

std::size_t widest_total(const search::Space& space) {
  std::size_t columns = 0;
  for (const search::PredictorChoices& predictor : space.predictors) {
    std::size_t most = 0;
    for (const search::FormBlock& form : predictor.forms) most = std::max(most, form.n_columns);
    columns += most;
  }
  return columns;
}

/// Forms of the predictors; how many candidates there are at least halves with every trial.
void draw_predictors(Random& random, std::size_t most_candidates, Eigen::Index n_rows, SmallSpace& small, Rows& rows,
                     std::vector<Eigen::VectorXd>& predictors) {
  const std::size_t n_predictors = 2 + below(random, 5);
  const double spread = chance(random, 0.2) ? 0.03 : 0.7;  // small: forms that are nearly equal
  const bool wide = chance(random, 0.4);
  std::size_t candidates = small.space.n_responses;
  for (std::size_t j = 0; j < n_predictors; ++j) {
    search::PredictorChoices choices;
    choices.always = chance(random, 0.1);
    Eigen::VectorXd x(n_rows);
    for (Eigen::Index i = 0; i < n_rows; ++i) x(i) = std::exp(spread * normal(random));
    if (j > 0 && chance(random, 0.25))  // a predictor close to an earlier one
      x = predictors[below(random, j)].cwiseProduct((0.1 * x.array().log()).exp().matrix());
    std::vector<std::size_t> menu{0, 1, 2, 3, 4};
    if (wide) menu.insert(menu.end(), {5, 6});
    std::shuffle(menu.begin(), menu.end(), random);
    const std::size_t room = most_candidates / candidates;
    const std::size_t n_forms = std::min({1 + below(random, 5), menu.size(), room > 1 ? room - 1 : 0});
    if (n_forms == 0) break;
    for (std::size_t f = 0; f < n_forms; ++f) choices.forms.push_back(append_form(random, x, menu[f], rows));
    candidates *= n_forms + (choices.always ? 0 : 1);
    predictors.push_back(x);
    small.space.predictors.push_back(choices);
  }
}

std::vector<Eigen::VectorXd> draw_responses(Random& random, std::size_t n, Eigen::Index n_rows,
                                            const std::vector<Eigen::VectorXd>& predictors) {
  const double noise = chance(random, 0.2) ? 100.0 : 0.1 + uniform(random);
  Eigen::VectorXd signal = Eigen::VectorXd::Zero(n_rows);
  for (const Eigen::VectorXd& x : predictors)
    if (chance(random, 0.6)) signal += (uniform(random) - 0.3) * x.array().log().matrix();
  for (Eigen::Index i = 0; i < n_rows; ++i) signal(i) += noise * normal(random) + 1.0;
  std::vector<Eigen::VectorXd> responses{signal};
  if (n > 1) responses.emplace_back((0.3 * signal.array()).exp());
  if (n > 2) responses.emplace_back(signal.array().cube());
  return responses;
}

void draw_limits(Random& random, SmallSpace& small) {
  std::size_t always = 0;
  for (const search::PredictorChoices& predictor : small.space.predictors) always += predictor.always ? 1 : 0;
  if (chance(random, 0.3)) small.space.max_terms = std::max(always, 1 + below(random, small.space.predictors.size()));
  constexpr std::size_t kKeep[] = {1, 3, 10, 50, 200};
  small.keep = kKeep[below(random, 5)];
  if (chance(random, 0.3)) small.within = 6.0 * uniform(random);
}

std::size_t terms_of(const search::Choice& choice) {
  return static_cast<std::size_t>(
      std::count_if(choice.choice.begin(), choice.choice.end(), [](std::uint16_t c) { return c != 0; }));
}

bool admitted(const SmallSpace& small, const search::Choice& choice) {
  for (std::size_t j = 0; j < choice.choice.size(); ++j)
    if (small.space.predictors[j].always && choice.choice[j] == 0) return false;
  for (const auto& [predictor, actions] : small.restriction.actions)
    if ((actions >> choice.choice[predictor] & 1) == 0) return false;
  const std::size_t terms = terms_of(choice);
  return terms <= small.space.max_terms.value_or(terms) && terms >= small.restriction.fewest_terms &&
         terms <= small.restriction.most_terms &&
         choice.response == small.restriction.response.value_or(choice.response);
}

bool better(const Scored& a, const Scored& b) {
  if (a.score != b.score) return a.score < b.score;
  if (a.choice.response != b.choice.response) return a.choice.response < b.choice.response;
  return a.choice.choice < b.choice.choice;
}

}  // namespace

SmallSpace draw_small_space(std::uint64_t seed, std::size_t most_candidates) {
  Random random(seed * 0x9E3779B97F4A7C15U + 1);
  SmallSpace small;
  small.space.n_responses = 1 + below(random, 3);
  constexpr Eigen::Index kRows[] = {9, 14, 30, 80, 200};
  const Eigen::Index n_rows = kRows[below(random, 5)];
  Rows rows;
  rows.weights = Eigen::VectorXd::Ones(n_rows);
  if (chance(random, 0.3))
    for (Eigen::Index i = 0; i < n_rows; ++i) rows.weights(i) = 0.2 + 3.0 * uniform(random);
  std::vector<Eigen::VectorXd> predictors;
  draw_predictors(random, most_candidates, n_rows, small, rows, predictors);
  const auto responses = draw_responses(random, small.space.n_responses, n_rows, predictors);
  small.grams.n_rows = static_cast<std::size_t>(n_rows);
  small.grams.n_columns = rows.columns.size();
  small.grams.n_responses = responses.size();
  small.grams.response_scale.assign(responses.size(), 1.0);
  small.grams.all = gram_of(rows, responses);
  const char* const criteria[] = {"AIC", "AICc", "BIC"};
  small.problem.penalty = penalty_of(criteria[below(random, 3)], small.grams.n_rows, widest_total(small.space));
  // candidates with nearly as many coefficients as rows have an RSS of rounding, and so a score of rounding
  for (std::size_t k = 0; k < small.problem.penalty.size(); ++k)
    if (k + 3 > small.grams.n_rows) small.problem.penalty[k] = std::numeric_limits<double>::infinity();
  // constants that bring the response forms to about the same level, as the Jacobian does
  for (std::size_t r = 0; r < responses.size(); ++r) {
    const std::size_t at = (small.grams.n_columns + r) * (small.grams.order() + 1);
    small.problem.constant.push_back(-static_cast<double>(n_rows) * std::log(small.grams.all[at]) +
                                     6.0 * normal(random));
  }
  draw_limits(random, small);
  return small;
}

double plain_score(const SmallSpace& small, const search::Choice& choice) {
  const std::size_t order = small.grams.order();
  const std::size_t y = small.grams.n_columns + choice.response;
  std::vector<std::size_t> at;
  for (std::size_t j = 0; j < choice.choice.size(); ++j) {
    if (choice.choice[j] == 0) continue;
    const search::FormBlock& form = small.space.predictors[j].forms[choice.choice[j] - 1u];
    for (std::size_t c = 0; c < form.n_columns; ++c) at.push_back(form.first_column + c);
  }
  const std::size_t k = at.size();
  at.push_back(y);
  std::vector<std::vector<Real>> a(k + 1, std::vector<Real>(k + 1));
  for (std::size_t i = 0; i <= k; ++i)
    for (std::size_t j = 0; j <= k; ++j) a[i][j] = small.grams.all[at[i] * order + at[j]];
  for (std::size_t c = 0; c < k; ++c) {
    if (!(a[c][c] > 1e-8L * small.grams.all[at[c] * (order + 1)])) return std::numeric_limits<double>::infinity();
    for (std::size_t i = c + 1; i <= k; ++i)
      for (std::size_t j = c + 1; j <= k; ++j) a[i][j] -= a[i][c] / a[c][c] * a[c][j];
  }
  const Real floor = 1e-12L * small.grams.all[y * (order + 1)];
  return static_cast<double>(static_cast<Real>(small.grams.n_rows) * std::log(std::max(a[k][k], floor)) +
                             small.problem.penalty.at(k) + small.problem.constant[choice.response]);
}

std::vector<Scored> score_all(const SmallSpace& small) {
  std::vector<Scored> all;
  search::Choice choice;
  choice.choice.assign(small.space.predictors.size(), 0);
  for (choice.response = 0; choice.response < small.space.n_responses; ++choice.response) {
    for (bool carried = false; !carried;) {
      if (admitted(small, choice)) {
        const double score = plain_score(small, choice);
        if (std::isfinite(score)) all.push_back({choice, score});
      }
      carried = true;
      for (std::size_t j = choice.choice.size(); carried && j-- > 0;) {
        carried = choice.choice[j] == small.space.predictors[j].forms.size();
        choice.choice[j] = carried ? std::uint16_t{0} : static_cast<std::uint16_t>(choice.choice[j] + 1);
      }
    }
  }
  std::sort(all.begin(), all.end(), better);
  return all;
}

std::vector<Scored> expected_list(const SmallSpace& small) {
  std::vector<Scored> all = score_all(small);
  if (all.size() > small.keep) all.resize(small.keep);
  while (!all.empty() && all.back().score > all.front().score + small.within) all.pop_back();
  return all;
}

}  // namespace formsieve::test

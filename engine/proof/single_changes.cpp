#include "proof/single_changes.hpp"

#include <Eigen/Cholesky>

#include <algorithm>
#include <limits>

namespace formsieve::proof {

namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();
/// Less left of a column than this share: its score would have too few digits to go by.
constexpr double kSmallestVariance = 1e-7;

}  // namespace

bool SingleChanges::prepare(const search::Choice& from) {
  response_ = from.response;
  columns_.clear();
  first_.assign(from.choice.size(), 0);
  width_.assign(from.choice.size(), 0);
  for (std::size_t j = 0; j < from.choice.size(); ++j) {
    if (from.choice[j] == 0) continue;
    const search::FormBlock& form = root_->space().predictors[j].forms[from.choice[j] - 1u];
    first_[j] = static_cast<Eigen::Index>(columns_.size());
    width_[j] = static_cast<Eigen::Index>(form.n_columns);
    for (std::size_t c = 0; c < form.n_columns; ++c)
      columns_.push_back(static_cast<Eigen::Index>(form.first_column + c));
  }
  const auto& b = root_->products(response_);
  const auto k = static_cast<Eigen::Index>(columns_.size());
  cross_ = root_->gram()(Eigen::all, columns_);
  const Eigen::LLT<Eigen::MatrixXd> factor(cross_(columns_, Eigen::all));
  if (k > 0 && (factor.info() != Eigen::Success ||
                factor.matrixLLT().diagonal().array().square().minCoeff() < kSmallestVariance))
    return false;
  inverse_ = factor.solve(Eigen::MatrixXd::Identity(k, k));
  beta_ = inverse_ * b(columns_);
  rss_ = 1.0 - beta_.dot(Eigen::VectorXd(b(columns_)));
  coefficients_.noalias() = cross_ * inverse_;
  variance_ = root_->gram().diagonal() - coefficients_.cwiseProduct(cross_).rowwise().sum();
  left_ = b - cross_ * beta_;
  return true;
}

double SingleChanges::left_out_rss(std::size_t predictor) const {
  const Eigen::Index q = width_[predictor];
  if (q == 0) return rss_;
  const Eigen::VectorXd own = beta_.segment(first_[predictor], q);
  if (q == 1) return rss_ + own(0) * own(0) / inverse_(first_[predictor], first_[predictor]);
  const auto block = inverse_.block(first_[predictor], first_[predictor], q, q);
  return rss_ + own.dot(block.llt().solve(own));
}

double SingleChanges::changed_rss(std::size_t predictor, const search::FormBlock& form, double without) const {
  const auto x = static_cast<Eigen::Index>(form.first_column);
  const auto w = static_cast<Eigen::Index>(form.n_columns);
  const Eigen::Index j = first_[predictor];
  const Eigen::Index q = width_[predictor];
  if (w == 1 && q <= 1) {
    double variance = variance_(x);
    double product = left_(x);
    if (q == 1) {
      variance += coefficients_(x, j) * coefficients_(x, j) / inverse_(j, j);
      product += coefficients_(x, j) * beta_(j) / inverse_(j, j);
    }
    return variance > kSmallestVariance ? without - product * product / variance : kInfinity;
  }
  Eigen::MatrixXd gram =
      root_->gram().block(x, x, w, w) - coefficients_.middleRows(x, w) * cross_.middleRows(x, w).transpose();
  Eigen::VectorXd product = left_.segment(x, w);
  if (q > 0) {
    const Eigen::MatrixXd own = coefficients_.block(x, j, w, q);
    const Eigen::LLT<Eigen::MatrixXd> block(inverse_.block(j, j, q, q));
    gram += own * block.solve(own.transpose());
    product += own * block.solve(beta_.segment(j, q));
  }
  const Eigen::LLT<Eigen::MatrixXd> factor(gram);
  if (factor.info() != Eigen::Success || factor.matrixLLT().diagonal().array().square().minCoeff() < kSmallestVariance)
    return kInfinity;
  return without - product.dot(factor.solve(product));
}

void SingleChanges::visit_predictor(const search::Choice& from, std::size_t j, std::size_t terms, const Visit& visit) {
  const std::size_t others = terms - (from.choice[j] == 0 ? 0 : 1);
  const std::size_t other_columns = columns_.size() - static_cast<std::size_t>(width_[j]);
  const double without = left_out_rss(j);
  const Actions actions = scope_->actions[j];
  if (from.choice[j] != 0 && (actions & 1) != 0 && others >= scope_->fewest_terms)
    visit(j, 0, root_->score(response_, without, other_columns));
  if (others + 1 > scope_->most_terms) return;
  const search::PredictorChoices& predictor = root_->space().predictors[j];
  for (std::size_t f = 0; f < predictor.forms.size(); ++f) {
    if (f + 1 == from.choice[j] || (actions >> (f + 1) & 1) == 0) continue;
    const double rss = changed_rss(j, predictor.forms[f], without);
    if (rss == kInfinity) continue;
    visit(j, static_cast<std::uint16_t>(f + 1),
          root_->score(response_, rss, other_columns + predictor.forms[f].n_columns));
  }
}

bool SingleChanges::operator()(const search::Choice& from, const Visit& visit) {
  if (!prepare(from)) return false;
  const std::size_t terms = search::n_terms(from.choice);
  for (std::size_t j = 0; j < from.choice.size(); ++j) visit_predictor(from, j, terms, visit);
  return true;
}

}  // namespace formsieve::proof

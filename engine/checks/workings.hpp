// What several checks need of one fit, made once: whether its residuals can be tested at all, and orthonormal bases of
// its design.
#pragma once

#include "checks/checks.hpp"

#include <Eigen/Core>

#include <string>
#include <vector>

namespace formsieve::checks {

/// Residuals whose standard deviation is below this share of the largest |response| are rounding, not data: storing the
/// response costs ε/2 = 1e-16 of it, and a backward-stable fit adds some tens of that.
inline constexpr double kRoundingShare = 1e-13;

/// Orthonormal basis of a design, whitened or not. The columns but the intercept are centred by their (weighted) means,
/// multiplied by √w and brought to unit length before the QR, which keeps the digits of columns far from zero.
struct Basis {
  Eigen::MatrixXd q;  ///< [n × p] orthonormal; column 0 is the intercept's direction, √w/‖√w‖
  Eigen::MatrixXd r;  ///< [p−1 × p−1] upper triangular; r'r is the (weighted) correlation matrix of the columns
  Eigen::VectorXd centre;         ///< [p−1] the (weighted) means
  Eigen::VectorXd length;         ///< [p−1] what the centred, whitened columns were divided by; 1 for a constant
  double intercept_length = 0.0;  ///< ‖√w‖
  bool full_rank = false;         ///< no column is a combination of others, by n·ε·max|r_jj|
};

/// `weights` may have size 0. Cost O(n k²).
Basis centred_basis(const Eigen::Ref<const Eigen::MatrixXd>& x, const Eigen::Ref<const Eigen::VectorXd>& weights);

struct Workings {
  const Subject& subject;
  Eigen::Index n;                ///< rows
  Eigen::Index p;                ///< design columns with the intercept
  std::string untestable;        ///< why the residuals cannot be tested; empty when they can
  Eigen::VectorXd root_weights;  ///< [n] √w; ones without weights
  Eigen::VectorXd residuals;  ///< [n] residual times √w: of equal variance if the weights are right. What is tested
  Basis plain;                ///< without the weights: spread is regressed on the design as it is
  Basis whitened;             ///< with the weights; empty when there are none (use of_the_fit)

  bool weighted() const { return subject.weights.size() > 0; }
  const Basis& of_the_fit() const { return weighted() ? whitened : plain; }
};

Workings prepare(const Subject& subject);

/// [p − 1] least-squares coefficients of the columns but the intercept, recovered from the fitted values. Requires a
/// full rank. Cost O(n k).
Eigen::VectorXd slopes_of(const Workings& workings);

/// What one term adds to the fitted value: [n] its column where it has one, otherwise the combination of its columns
/// that the fit has found, less a constant. Depends on the fitted values alone, so that powers of it are independent of
/// normal residuals (Milliken & Graybill 1970).
Eigen::VectorXd term_curve(const Workings& workings, const Eigen::VectorXd& slopes, std::size_t term);

/// First design column of a term and one past its last.
struct TermColumns {
  Eigen::Index first = 0, end = 0;
  Eigen::Index count() const { return end - first; }
};
TermColumns columns_of(const Workings& workings, std::size_t term);
std::size_t n_terms(const Workings& workings);
/// "ln(area)", or "term 2" where there is no name.
std::string term_name(const Workings& workings, std::size_t term);

/// A check with its names filled in that passes until shown otherwise.
Check named(const char* name, const char* method, const char* hypothesis);

/// Adds to the note of a residual check of a weighted fit what was tested.
void note_weights(const Workings& workings, Check& check);

/// `x` with its rows in the order given.
Eigen::VectorXd in_order(const Eigen::VectorXd& x, const std::vector<std::size_t>& order);
bool order_covers_all_rows(const Subject& subject);

/// x − mean(x).
Eigen::VectorXd centred(const Eigen::Ref<const Eigen::VectorXd>& x);

/// checks::run_all on workings that are made already.
std::vector<Check> run_all(const Workings& workings);

// One function a check, each in the file of its name.
Check normal_residuals(const Workings& workings);
Check equal_spread(const Workings& workings);
Check equal_spread_by_term(const Workings& workings);
Check equal_spread_by_thirds(const Workings& workings);
Check equal_spread_any_shape(const Workings& workings);
Check straightness(const Workings& workings);
Check straightness_by_term(const Workings& workings);
Check separable_terms(const Workings& workings);
Check no_single_row(const Workings& workings);
Check independence(const Workings& workings);
Check independence_at_lags(const Workings& workings);

}  // namespace formsieve::checks

// What several checks need of one fit, made once: whether its residuals can be tested at all, and orthonormal bases of
// its design.
#pragma once

#include "checks/checks.hpp"

#include <Eigen/Core>

#include <string>

namespace formsieve::checks {

/// Residuals whose standard deviation is below this share of the largest |response| are rounding, not data: storing the
/// response costs ε/2 = 1e-16 of it, and a backward-stable fit adds some tens of that.
inline constexpr double kRoundingShare = 1e-13;

/// QR of the design without its intercept, every column centred by its (weighted) mean, multiplied by √w and brought to
/// unit length. Together with √w/√Σw, `q` spans the whitened design.
struct Basis {
  Eigen::MatrixXd q;       ///< [n × k] orthonormal
  Eigen::MatrixXd r;       ///< [k × k] upper triangular; r'r is the (weighted) correlation matrix of the columns
  bool full_rank = false;  ///< no column is a combination of others, by n·ε·max|r_jj|
};

/// `weights` may have size 0. Cost O(n k²).
Basis centred_basis(const Eigen::Ref<const Eigen::MatrixXd>& x, const Eigen::Ref<const Eigen::VectorXd>& weights);

struct Workings {
  const Subject& subject;
  Eigen::Index n;          ///< rows
  Eigen::Index p;          ///< design columns with the intercept
  std::string untestable;  ///< why the residuals cannot be tested; empty when they can
  Basis plain;             ///< unweighted: auxiliary regressions are unweighted
  Basis whitened;          ///< with the weights; empty when there are none (use `plain`)

  bool weighted() const { return subject.weights.size() > 0; }
  const Basis& of_the_fit() const { return weighted() ? whitened : plain; }
};

Workings prepare(const Subject& subject);

/// A check with its names filled in that passes until shown otherwise.
Check named(const char* name, const char* method, const char* hypothesis);

/// Adds to the note of a residual check that weights were not applied. Residuals are tested as measured.
void note_weights(const Workings& workings, Check& check);

/// x − mean(x).
Eigen::VectorXd centred(const Eigen::Ref<const Eigen::VectorXd>& x);

// One function a check, each in the file of its name.
Check normal_residuals(const Workings& workings);
Check equal_spread(const Workings& workings);
Check equal_spread_by_term(const Workings& workings);
Check straightness(const Workings& workings);
Check separable_terms(const Workings& workings);
Check no_single_row(const Workings& workings);
Check independence(const Workings& workings);

}  // namespace formsieve::checks

#include "checks/durbin_watson.hpp"
#include "support.hpp"

#include <Eigen/Eigenvalues>
#include <Eigen/QR>

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <numbers>

namespace formsieve::checks {

namespace {

Eigen::MatrixXd squared_differences(Eigen::Index n) {
  Eigen::MatrixXd a = Eigen::MatrixXd::Zero(n, n);
  for (Eigen::Index t = 1; t < n; ++t) {
    a(t, t) += 1.0;
    a(t - 1, t - 1) += 1.0;
    a(t, t - 1) = a(t - 1, t) = -1.0;
  }
  return a;
}

Eigen::MatrixXd orthonormal(const Eigen::MatrixXd& x) {
  return Eigen::HouseholderQR<Eigen::MatrixXd>(x).householderQ() * Eigen::MatrixXd::Identity(x.rows(), x.cols());
}

/// Constant and k eigenvectors of the matrix of squared differences, cos(πj(t + ½)/n): those of the largest eigenvalues
/// leave the distribution of the lower bound d_L, those of the smallest that of d_U (Durbin & Watson 1950).
Eigen::MatrixXd bounding_design(Eigen::Index n, Eigen::Index k, bool lower) {
  Eigen::MatrixXd q(n, k + 1);
  for (Eigen::Index c = 0; c <= k; ++c) {
    const Eigen::Index j = c == 0 ? 0 : (lower ? n - c : c);
    for (Eigen::Index t = 0; t < n; ++t)
      q(t, c) =
          std::cos(std::numbers::pi * static_cast<double>(j) * (static_cast<double>(t) + 0.5) / static_cast<double>(n));
    q.col(c).normalize();
  }
  return q;
}

/// Eigenvalues of C = M(A − dI)M, M the projection off the design, as the definition has it.
Eigen::VectorXd eigenvalues_of_form(const Eigen::MatrixXd& q, double d) {
  const Eigen::Index n = q.rows();
  const Eigen::MatrixXd s = squared_differences(n) - d * Eigen::MatrixXd::Identity(n, n);
  const Eigen::MatrixXd m = Eigen::MatrixXd::Identity(n, n) - q * q.transpose();
  return Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd>(m * s * m, Eigen::EigenvaluesOnly).eigenvalues();
}

/// Imhof 1961 by Simpson's rule in x with u = x/(1 − x)²: P(Σ λ z² < 0).
double imhof_by_simpson(Eigen::VectorXd lambda) {
  lambda /= lambda.norm();
  const auto integrand = [&](double x) {
    const double u = x / ((1.0 - x) * (1.0 - x));
    double angle = 0.0;
    double log_size = 0.0;
    for (const double l : lambda) {
      angle += 0.5 * std::atan(l * u);
      log_size += 0.25 * std::log1p(l * l * u * u);
    }
    return std::sin(angle) / u * std::exp(-log_size) * (1.0 + x) / std::pow(1.0 - x, 3);
  };
  constexpr int kPanels = 20000;
  double total = 0.0;
  for (int i = 1; i < kPanels; ++i) total += (i % 2 == 1 ? 4.0 : 2.0) * integrand(static_cast<double>(i) / kPanels);
  total += integrand(1e-12);
  return 0.5 - total / (3.0 * kPanels) / std::numbers::pi;
}

}  // namespace

TEST_CASE("checks: Durbin–Watson statistic and autocorrelation are those worked by hand", "[checks][unit]") {
  // e = 1, −1, 2, −2: differences −2, 3, −4: Σ = 29, Σe² = 10. Mean 0: Σ e_t e_{t−1} = −1 − 2 − 4 = −7
  const Eigen::VectorXd e = vector_of({1, -1, 2, -2});
  CHECK(durbin_watson(e) == Approx(2.9).epsilon(1e-14));
  CHECK(lag_one_autocorrelation(e) == Approx(-0.7).epsilon(1e-14));
  CHECK(lag_one_autocorrelation(vector_of({3, 3, 3})) == 0.0);
}

TEST_CASE("checks: exact Durbin–Watson distribution gives the published bounds", "[checks][reference]") {
  // 5 % bounds, Savin & White 1977 (three decimals); the further digits from Imhof's integral by another program
  struct Row {
    Eigen::Index n, k;
    double lower, upper;
  };
  for (const Row& row : {Row{15, 1, 1.07696, 1.36055}, Row{24, 4, 1.01310, 1.77526}, Row{50, 3, 1.42059, 1.67385},
                         Row{70, 5, 1.46369, 1.76827}, Row{100, 2, 1.63369, 1.71517}, Row{20, 2, 1.100, 1.537},
                         Row{30, 3, 1.214, 1.650}}) {
    INFO(row.n << " rows, " << row.k << " regressors");
    const double margin = row.lower == 1.100 || row.lower == 1.214 ? 5e-4 : 2e-6;  // of the bounds' last digit
    CHECK(DurbinWatsonDistribution(bounding_design(row.n, row.k, true)).lower_tail(row.lower) ==
          Approx(0.05).margin(margin));
    CHECK(DurbinWatsonDistribution(bounding_design(row.n, row.k, false)).lower_tail(row.upper) ==
          Approx(0.05).margin(margin));
  }
}

TEST_CASE("checks: exact Durbin–Watson distribution equals Imhof's integral over eigenvalues", "[checks][property]") {
  Normals normals(1);
  for (const Eigen::Index n : {9, 16, 40, 120}) {
    const Eigen::MatrixXd q = orthonormal(normals.design(n, 4));
    const DurbinWatsonDistribution distribution(q);
    for (const double d : {1.2, 1.7, 2.0, 2.6}) {
      INFO(n << " rows, d = " << d);
      CHECK(distribution.lower_tail(d) == Approx(imhof_by_simpson(eigenvalues_of_form(q, d))).margin(1e-7));
    }
  }
}

TEST_CASE("checks: exact Durbin–Watson distribution is an arc tangent with two degrees of freedom",
          "[checks][property]") {
  // Q = λ₁z₁² − λ₂z₂² is negative with probability (2/π)·atan √(λ₂/λ₁)
  Normals normals(7);
  const Eigen::Index n = 6;
  const Eigen::MatrixXd q = orthonormal(normals.design(n, n - 2));
  const double d = 2.0;
  const Eigen::VectorXd lambda = eigenvalues_of_form(q, d);
  REQUIRE(lambda.minCoeff() < 0.0);
  REQUIRE(lambda.maxCoeff() > 0.0);
  const double expected = 2.0 / std::numbers::pi * std::atan(std::sqrt(-lambda.minCoeff() / lambda.maxCoeff()));
  CHECK(DurbinWatsonDistribution(q).lower_tail(d) == Approx(expected).margin(1e-8));
}

TEST_CASE("checks: Durbin–Watson by moments comes close to the exact value in large samples", "[checks][property]") {
  Normals normals(3);
  const Eigen::Index n = 5000;
  const Eigen::MatrixXd q = orthonormal(normals.design(n, 6));
  const DurbinWatsonDistribution distribution(q);
  for (const double d : {1.94, 1.96, 1.98, 2.01, 2.05})
    CHECK(distribution.lower_tail_by_moments(d) == Approx(distribution.lower_tail(d)).margin(4e-4));
}

TEST_CASE("checks: Durbin–Watson p is uniform for independent errors, weighted too", "[checks][property]") {
  Normals normals(11);
  const Eigen::Index n = 25;
  const Eigen::MatrixXd x = normals.design(n, 3);
  const Eigen::VectorXd weights = normals.vector(n).array().exp();
  constexpr int kSamples = 400;
  for (const bool weighted : {false, true}) {
    std::vector<double> p;
    for (int sample = 0; sample < kSamples; ++sample) {
      Eigen::VectorXd y = normals.vector(n);
      if (weighted) y.array() *= weights.array().rsqrt();
      const Fitted fit = fit_by_long_double(x, y, weighted ? weights : Eigen::VectorXd(0));
      p.push_back(check_named(run_all(fit.ordered(row_order(n))), "independence").p.value());
    }
    std::sort(p.begin(), p.end());
    double distance = 0.0;  // Kolmogorov's; 1.63/√400 = 0.0815 is its 1 % point
    for (int i = 0; i < kSamples; ++i)
      distance = std::max(distance, std::abs(p[static_cast<std::size_t>(i)] - (i + 0.5) / kSamples) + 0.5 / kSamples);
    CHECK(distance < 0.0815);
  }
}

TEST_CASE("checks: independence follows the order given, and fails on a drift", "[checks][unit]") {
  Normals normals(5);
  const Eigen::Index n = 60;
  const Eigen::MatrixXd x = normals.design(n, 3);
  Eigen::VectorXd error = normals.vector(n);
  for (Eigen::Index t = 1; t < n; ++t) error[t] += 0.8 * error[t - 1];
  const Fitted fit = fit_by_long_double(x, error);
  auto order = row_order(n);
  const Check along = check_named(run_all(fit.ordered(order)), "independence");
  CHECK_FALSE(along.passes);
  CHECK(along.size > 0.5);

  std::reverse(order.begin(), order.end());
  const Check backwards = check_named(run_all(fit.ordered(order)), "independence");
  CHECK(backwards.statistic.value() == Approx(along.statistic.value()).epsilon(1e-12));
  CHECK(backwards.p.value() == Approx(along.p.value()).margin(1e-8));

  std::vector<std::size_t> mixed(order.size());
  for (std::size_t i = 0; i < mixed.size(); ++i) mixed[i] = (i * 37) % mixed.size();  // 37 and 60 share no factor
  const Check shuffled = check_named(run_all(fit.ordered(mixed)), "independence");
  CHECK(shuffled.passes);
  CHECK(shuffled.statistic.value() != Approx(along.statistic.value()));
}

TEST_CASE("checks: independence notices neighbours that alternate", "[checks][unit]") {
  Normals normals(13);
  const Eigen::Index n = 40;
  const Eigen::MatrixXd x = normals.design(n, 2);
  Eigen::VectorXd error = 0.3 * normals.vector(n);
  for (Eigen::Index t = 0; t < n; ++t) error[t] += t % 2 == 0 ? 1.0 : -1.0;
  const Check check = check_named(run_all(fit_by_long_double(x, error).ordered(row_order(n))), "independence");
  CHECK(check.statistic.value() > 3.0);
  CHECK_FALSE(check.passes);
}

}  // namespace formsieve::checks

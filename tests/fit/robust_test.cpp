// Robust fits: beside statsmodels, beside published ones, and their properties.
#include "fit/m_estimate.hpp"
#include "fit/robust.hpp"
#include "fit/s_estimate.hpp"

#include "base/random.hpp"

#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include <Eigen/QR>

#include <algorithm>
#include <cmath>
#include <fstream>
#include <numbers>
#include <sstream>
#include <string>
#include <vector>

namespace {

using namespace formsieve;
using Eigen::Index;

/// Standard normal numbers, the same on every machine.
struct Normals {
  base::SplitMix64 random;
  explicit Normals(std::uint64_t seed) : random(seed) {}
  double uniform() { return (static_cast<double>(random.next() >> 11U) + 0.5) * 0x1.0p-53; }
  double next() {
    const double radius = std::sqrt(-2.0 * std::log(uniform()));
    return radius * std::cos(2.0 * std::numbers::pi * uniform());
  }
  Eigen::VectorXd vector(Index n) {
    Eigen::VectorXd values(n);
    for (double& value : values) value = next();
    return values;
  }
  Eigen::MatrixXd design(Index n, Index p) {
    Eigen::MatrixXd x(n, p);
    x.col(0).setOnes();
    for (Index j = 1; j < p; ++j) x.col(j) = vector(n);
    return x;
  }
};

const Eigen::VectorXd kNone(0);

fit::RobustFit robust(const Eigen::MatrixXd& x, const Eigen::VectorXd& y, const Eigen::VectorXd& weights = kNone) {
  const auto plain = fit::least_squares(x, y, weights);
  REQUIRE(plain.ok());
  const auto result = fit::robust_fit(x, weights, *plain);
  REQUIRE(result.ok());
  return *result;
}

nlohmann::json reference_file(const std::string& name) {
  return nlohmann::json::parse(std::ifstream(FORMSIEVE_SOURCE_DIR "/tests/reference/" + name));
}

/// A column of one of the open tables; these have no quotes and no missing values.
Eigen::VectorXd open_column(const std::string& table, const std::string& column) {
  std::ifstream file(FORMSIEVE_SOURCE_DIR "/tests/reference/open/" + table + ".csv");
  const auto cells = [](const std::string& line) {
    std::vector<std::string> result;
    std::istringstream stream(line);
    for (std::string cell; std::getline(stream, cell, ',');) result.push_back(cell);
    return result;
  };
  std::string line;
  std::getline(file, line);
  const auto header = cells(line);
  const auto at = std::find(header.begin(), header.end(), column) - header.begin();
  REQUIRE(at < static_cast<std::ptrdiff_t>(header.size()));
  std::vector<double> values;
  while (std::getline(file, line)) values.push_back(std::stod(cells(line)[static_cast<std::size_t>(at)]));
  return Eigen::Map<Eigen::VectorXd>(values.data(), static_cast<Index>(values.size()));
}

struct Problem {
  Eigen::MatrixXd x;
  Eigen::VectorXd y;
};

Problem open_problem(const std::string& table, const std::string& response, const std::vector<std::string>& columns) {
  Problem problem;
  problem.y = open_column(table, response);
  problem.x = Eigen::MatrixXd::Ones(problem.y.size(), static_cast<Index>(columns.size()) + 1);
  for (std::size_t j = 0; j < columns.size(); ++j)
    problem.x.col(static_cast<Index>(j) + 1) = open_column(table, columns[j]);
  return problem;
}

Problem stackloss() { return open_problem("stackloss", "stack_loss", {"air_flow", "water_temp", "acid_conc"}); }

void same(const Eigen::VectorXd& ours, const std::vector<double>& theirs, double tolerance_rel) {
  REQUIRE(ours.size() == static_cast<Index>(theirs.size()));
  for (std::size_t j = 0; j < theirs.size(); ++j)
    CHECK(ours[static_cast<Index>(j)] == Approx(theirs[j]).epsilon(tolerance_rel));
}

/// Rows in orthonormal coordinates as the room's own functions take them, U = √n·Q by QR here.
struct Coordinates {
  Eigen::MatrixXd u, to_design;
  explicit Coordinates(const Eigen::MatrixXd& x) {
    const double root_n = std::sqrt(static_cast<double>(x.rows()));
    const Eigen::HouseholderQR<Eigen::MatrixXd> qr(x);
    u = (qr.householderQ() * Eigen::MatrixXd::Identity(x.rows(), x.cols())) * root_n;
    to_design = x.colPivHouseholderQr().solve(u);
  }
};

}  // namespace

TEST_CASE("fit: MM and Huber estimates equal statsmodels and an exhaustive search for S", "[fit][reference]") {
  const auto values = reference_file("robust/robust.json");  // kept while its parts are looked at
  for (const auto& theirs : values.at("fits")) {
    const std::string table = theirs.at("table");
    INFO(table);
    const Problem problem = open_problem(table, theirs.at("response"), theirs.at("columns"));
    const fit::RobustFit ours = robust(problem.x, problem.y);
    CHECK(ours.method == "MM, bisquare");
    CHECK(ours.scale == Approx(theirs.at("s_scale").get<double>()).epsilon(1e-9));
    same(ours.coefficients, theirs.at("mm"), 1e-7);

    const Coordinates coordinates(problem.x);
    const Eigen::Ref<const Eigen::MatrixXd> u(coordinates.u);
    const Eigen::Ref<const Eigen::VectorXd> e(problem.y);
    const auto huber = fit::huber_estimate({u, e});
    REQUIRE(huber);
    same(coordinates.to_design * huber->delta, theirs.at("huber"), 1e-7);
    CHECK(huber->scale == Approx(theirs.at("huber_scale").get<double>()).epsilon(1e-7));
    const auto s = fit::s_estimate({u, e});
    REQUIRE(s);
    same(coordinates.to_design * s->delta, theirs.at("s"), 1e-6);
  }
}

TEST_CASE("fit: stack loss has the robust coefficients that are known of it", "[fit][reference]") {
  // both from memory of published output: MM −41.5246, 0.9388, 0.5796, −0.1129, scale 1.912; Huber M with the scale by
  // the median −41.0265, 0.8294, 0.9261, −0.1278, scale 2.44
  const Problem problem = stackloss();
  const fit::RobustFit mm = robust(problem.x, problem.y);
  const std::vector<double> known{-41.5246, 0.9388, 0.5796, -0.1129};
  for (std::size_t j = 0; j < known.size(); ++j)
    CHECK(mm.coefficients[static_cast<Index>(j)] == Approx(known[j]).margin(1e-4));
  CHECK(mm.scale == Approx(1.912).margin(1e-3));

  const Coordinates coordinates(problem.x);
  const auto huber = fit::huber_estimate({coordinates.u, problem.y});
  const Eigen::VectorXd b = coordinates.to_design * huber.value().delta;
  const std::vector<double> known_huber{-41.0265, 0.8294, 0.9261, -0.1278};
  for (std::size_t j = 0; j < known_huber.size(); ++j)
    CHECK(b[static_cast<Index>(j)] == Approx(known_huber[j]).margin(1e-4));
  CHECK(huber->scale == Approx(2.44).margin(5e-3));
}

TEST_CASE("fit: the MM estimate makes its own equation zero and lies at a minimum", "[fit][property]") {
  Normals normals(1);
  const Eigen::MatrixXd x = normals.design(80, 4);
  Eigen::VectorXd y = x.rowwise().sum() + normals.vector(80);
  y.head(10).array() += 8.0;
  const fit::RobustFit ours = robust(x, y);
  const auto total = [&](const Eigen::VectorXd& b) {
    double sum = 0.0;
    const Eigen::VectorXd r = y - x * b;
    for (const double one : r) sum += fit::kEfficient.rho(one / ours.scale);
    return sum;
  };
  const Eigen::VectorXd r = y - x * ours.coefficients;
  const Eigen::VectorXd equation = x.transpose() * ours.weight_rel.cwiseProduct(r);
  CHECK(equation.lpNorm<Eigen::Infinity>() < 1e-7);
  for (Index i = 0; i < 80; ++i)
    CHECK(ours.weight_rel[i] == Approx(fit::kEfficient.weight(r[i] / ours.scale)).margin(1e-9));
  for (Index j = 0; j < 4; ++j)
    for (const double move : {-0.02, 0.02})
      CHECK(total(ours.coefficients + move * Eigen::VectorXd::Unit(4, j)) > total(ours.coefficients));
}

TEST_CASE("fit: ρ, ψ and ψ′ of the bisquare belong together, and the scale halves ρ", "[fit][property]") {
  const double h = 1e-6;
  for (const double u : {-4.0, -2.0, -0.5, 0.3, 1.7, 4.6, 5.0}) {
    const auto psi = [](double v) { return v * fit::kEfficient.weight(v); };
    const double c2 = fit::kEfficient.c * fit::kEfficient.c;
    // ρ is scaled to 1 at most, so ρ′ = 6ψ/c²
    CHECK((fit::kEfficient.rho(u + h) - fit::kEfficient.rho(u - h)) / (2 * h) ==
          Approx(6.0 * psi(u) / c2).margin(1e-8));
    CHECK((psi(u + h) - psi(u - h)) / (2 * h) == Approx(fit::kEfficient.derivative(u)).margin(1e-8));
  }
  Normals normals(2);
  const Eigen::VectorXd r = 3.0 * normals.vector(4001);
  const double scale = fit::m_scale(r, 1, 1.0);
  double total = 0.0;
  for (const double one : r) total += fit::kHalfBreakdown.rho(one / scale);
  CHECK(total == Approx(2000.0).epsilon(1e-10));
  CHECK(scale == Approx(3.0).epsilon(0.05));  // consistent at the normal distribution
}

TEST_CASE("fit: a robust fit follows the units of response and columns", "[fit][property]") {
  Normals normals(3);
  const Index n = 60;
  const Eigen::MatrixXd x = normals.design(n, 3);
  Eigen::VectorXd y = x * Eigen::Vector3d(1, 2, -1) + normals.vector(n);
  y.head(12).array() += 20.0;
  const fit::RobustFit plain = robust(x, y);
  Eigen::MatrixXd other = x;
  other.col(1) = 1000.0 + 50.0 * x.col(1).array();
  other.col(2) = x.col(2) - 3.0 * x.col(1);
  const Eigen::VectorXd moved = 10.0 * y + x * Eigen::Vector3d(5, 7, 9);
  const fit::RobustFit ours = robust(other, moved);
  // the same equation: fitted values go with the response
  const Eigen::VectorXd expected = 10.0 * (x * plain.coefficients) + x * Eigen::Vector3d(5, 7, 9);
  CHECK((other * ours.coefficients - expected).lpNorm<Eigen::Infinity>() < 1e-6);
  CHECK(ours.scale == Approx(10.0 * plain.scale).epsilon(1e-8));
  CHECK(ours.n_downweighted == plain.n_downweighted);
}

TEST_CASE("fit: 30 % gross outliers do not move the MM estimate, and move least squares", "[fit][property]") {
  Normals normals(4);
  for (const Index p : {2, 4, 8}) {
    INFO(p << " columns");
    const Index n = 200;
    Eigen::MatrixXd x = normals.design(n, p);
    Eigen::VectorXd y = x.rowwise().sum() + 0.5 * normals.vector(n);
    const Index bad = 3 * n / 10;
    for (Index i = 0; i < bad; ++i) {  // together, and at high leverage
      x(i, 1) = 10.0 + 0.1 * normals.next();
      y[i] = -50.0 + normals.next();
    }
    const auto plain = fit::least_squares(x, y, kNone);
    const fit::RobustFit ours = robust(x, y);
    CHECK((plain->coefficients.array() - 1.0).abs().maxCoeff() > 1.0);
    CHECK((ours.coefficients.array() - 1.0).abs().maxCoeff() < 0.2);
    CHECK(ours.weight_rel.head(bad).maxCoeff() == 0.0);
    CHECK(ours.n_downweighted >= static_cast<std::size_t>(bad));
    CHECK(ours.n_downweighted < static_cast<std::size_t>(bad + n / 10));
  }
}

TEST_CASE("fit: with normal errors MM is close to least squares, also on more rows than candidates see",
          "[fit][property]") {
  Normals normals(5);
  for (const Index n : {100, 3000, 30000}) {
    const Eigen::MatrixXd x = normals.design(n, 3);
    const Eigen::VectorXd y = x.rowwise().sum() + normals.vector(n);
    const auto plain = fit::least_squares(x, y, kNone);
    const fit::RobustFit ours = robust(x, y);
    INFO(n << " rows");
    // variance of the difference is 1/0.95 − 1 = 5 % of that of least squares: 0.23 standard errors
    CHECK((ours.coefficients - plain->coefficients).cwiseQuotient(plain->se).cwiseAbs().maxCoeff() < 0.23 * 4.0);
    CHECK(ours.scale == Approx(1.0).epsilon(6.0 / std::sqrt(static_cast<double>(n))));
  }
}

TEST_CASE("fit: a robust fit with weights is that of the rows times √weight", "[fit][property]") {
  Normals normals(6);
  const Index n = 70;
  const Eigen::MatrixXd x = normals.design(n, 3);
  const Eigen::VectorXd weights = normals.vector(n).array().exp();
  const Eigen::VectorXd y = x.rowwise().sum() + normals.vector(n).cwiseQuotient(weights.cwiseSqrt());
  const fit::RobustFit ours = robust(x, y, weights);
  const Eigen::VectorXd r = weights.cwiseSqrt().cwiseProduct(y - x * ours.coefficients);
  const Eigen::VectorXd equation = (weights.cwiseSqrt().asDiagonal() * x).transpose() * ours.weight_rel.cwiseProduct(r);
  CHECK(equation.lpNorm<Eigen::Infinity>() < 1e-7);
  const fit::RobustFit same_again = robust(x, y, Eigen::VectorXd::Ones(n));
  const fit::RobustFit without = robust(x, y);
  CHECK((same_again.coefficients - without.coefficients).lpNorm<Eigen::Infinity>() < 1e-9);
}

TEST_CASE("fit: rare levels do not keep a robust fit from being found", "[fit][property]") {
  Normals normals(7);
  const Index n = 120;
  Eigen::MatrixXd x = normals.design(n, 5);
  for (const Index column : {3, 4}) x.col(column).setZero();
  for (Index i = 0; i < 4; ++i) {
    x(i, 3) = 1.0;
    x(40 + i, 4) = 1.0;
  }
  const Eigen::VectorXd y = x.rowwise().sum() + normals.vector(n);
  const fit::RobustFit ours = robust(x, y);
  CHECK(ours.method == "MM, bisquare");
  CHECK(ours.coefficients.allFinite());
}

TEST_CASE("fit: a robust fit is refused where most rows lie on one equation exactly, or all, or no residual is left",
          "[fit][unit]") {
  Normals normals(8);
  const Eigen::MatrixXd x = normals.design(40, 2);
  Eigen::VectorXd y = x.rowwise().sum();
  for (Index i = 0; i < 15; ++i) y[i] += 3.0 * normals.next();
  const auto most = fit::robust_fit(x, kNone, *fit::least_squares(x, y, kNone));
  REQUIRE_FALSE(most.ok());
  CHECK_THAT(most.error().message, Catch::Contains("more than half of the rows lie on one equation exactly"));
  for (Index i = 15; i < 25; ++i) y[i] += 3.0 * normals.next();  // now 15 of 40
  CHECK(fit::robust_fit(x, kNone, *fit::least_squares(x, y, kNone)).ok());

  const Eigen::VectorXd exact = x.rowwise().sum();
  const auto no_residuals = fit::robust_fit(x, kNone, *fit::least_squares(x, exact, kNone));
  REQUIRE_FALSE(no_residuals.ok());
  CHECK_THAT(no_residuals.error().message, Catch::Contains("exactly"));
  const auto square = fit::robust_fit(x.topRows(2), kNone, *fit::least_squares(x.topRows(2), y.head(2), kNone));
  REQUIRE_FALSE(square.ok());
  CHECK_THAT(square.error().message, Catch::Contains("as many coefficients as rows"));
}

TEST_CASE("fit: two robust fits of the same rows are the same bits", "[fit][unit]") {
  Normals normals(9);
  const Eigen::MatrixXd x = normals.design(900, 4);
  const Eigen::VectorXd y = x.rowwise().sum() + normals.vector(900);
  CHECK(robust(x, y).coefficients == robust(x, y).coefficients);
}

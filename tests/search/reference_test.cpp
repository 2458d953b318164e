// Worked cases with weights: the walk's held-out errors are unweighted, its RSS weighted.
//
// Values: tests/reference/cases, 25-digit multiple-precision figures ("mp") beside NumPy, SciPy and statsmodels; the
// versions are in each file.
#include "problem.hpp"

#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include <cmath>
#include <filesystem>
#include <fstream>
#include <string>

using namespace formsieve;

namespace {

double form_value(const std::string& form, double x) { return form == "sqrt" ? std::sqrt(x) : x; }

/// The case as a space of one form a predictor.
test::Problem problem_of(const nlohmann::json& input) {
  test::Problem problem;
  const auto& data = input.at("data");
  const std::vector<double> response = data.at(input.at("response").get<std::string>());
  const auto n = static_cast<Eigen::Index>(response.size());
  problem.responses.resize(n, 1);
  for (Eigen::Index i = 0; i < n; ++i)
    problem.responses(i, 0) = form_value(input.at("response_form").at("form"), response[static_cast<std::size_t>(i)]);
  problem.columns.resize(n, static_cast<Eigen::Index>(input.at("terms").size()));
  for (Eigen::Index c = 0; c < problem.columns.cols(); ++c) {
    const auto& term = input.at("terms").at(static_cast<std::size_t>(c));
    const std::vector<double> x = data.at(term.at("column").get<std::string>());
    for (Eigen::Index i = 0; i < n; ++i)
      problem.columns(i, c) = form_value(term.at("form"), x[static_cast<std::size_t>(i)]);
    problem.space.predictors.push_back({{{static_cast<std::size_t>(c), 1}}, true});
  }
  problem.weights = input.at("weights").get<std::vector<double>>();
  problem.fold_of = {input.at("folds").get<std::vector<std::uint32_t>>()};
  return problem;
}

}  // namespace

TEST_CASE("search: walk gives the published RSS and CV RMSE of weighted cases", "[search][reference]") {
  for (const char* name : {"case_25.json", "case_26.json"}) {
    std::ifstream file(std::filesystem::path(FORMSIEVE_SOURCE_DIR) / "tests/reference/cases" / name);
    const auto reference = nlohmann::json::parse(file);
    const test::Problem problem = problem_of(reference.at("input"));
    const auto result = search::walk(problem.space, test::grams_of(problem), test::keep_all(problem.space, 2.0));
    REQUIRE(result.lists[0][0].size() == 1);
    const auto& scored = result.lists[0][0][0];
    const auto expected = [&](const char* key) { return std::stod(reference.at("mp").at(key).get<std::string>()); };
    const double n = static_cast<double>(problem.columns.rows());
    CHECK(scored.rss == Approx(expected("rss")).epsilon(1e-11));
    CHECK(std::sqrt(scored.cv_sse / n) == Approx(expected("cv.rmse_transformed")).epsilon(1e-11));
  }
}

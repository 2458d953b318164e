#include "example.hpp"

#include <cmath>
#include <numeric>

namespace formsieve::test {

using forms::Kind;

double uniform(std::mt19937_64& random) { return (static_cast<double>(random() >> 11U) + 0.5) * 0x1p-53; }

double normal(std::mt19937_64& random) {
  return std::sqrt(-2.0 * std::log(uniform(random))) * std::cos(6.283185307179586 * uniform(random));
}

forms::Form form(Kind kind) {
  forms::Form result;
  result.kind = kind;
  return result;
}

forms::Form levels(const std::vector<std::string>& names) {
  forms::Form result = form(Kind::levels);
  result.levels = names;
  return result;
}

std::vector<std::size_t> all_rows(std::size_t n) {
  std::vector<std::size_t> rows(n);
  std::iota(rows.begin(), rows.end(), std::size_t{0});
  return rows;
}

design::Data example_data(std::uint64_t seed, std::size_t n_rows, bool weighted) {
  std::mt19937_64 random(seed);
  design::Data data;
  data.n_rows = n_rows;
  data.table_row = all_rows(n_rows);
  data.response_forms = {form(Kind::identity), form(Kind::ln)};
  data.predictors.resize(3);
  data.predictors[0].column = "area";
  data.predictors[0].menu = {form(Kind::identity), form(Kind::sqrt), form(Kind::ln), form(Kind::reciprocal)};
  data.predictors[1].column = "load";
  data.predictors[1].menu = {form(Kind::identity), form(Kind::quadratic)};
  data.predictors[2].column = "site";
  data.predictors[2].text = true;
  data.predictors[2].menu = {levels({"north", "south", "west"})};
  for (std::size_t i = 0; i < n_rows; ++i) {
    const double area = std::exp(5.0 + 0.8 * normal(random));
    const double load = 20.0 + 5.0 * normal(random);
    const auto site = static_cast<double>(random() % 3);
    data.predictors[0].raw.push_back(area);
    data.predictors[1].raw.push_back(load);
    data.predictors[2].raw.push_back(site);
    data.response.push_back(std::exp(0.6 * std::log(area) + 0.002 * load * load + 0.2 * site + 0.2 * normal(random)));
    if (weighted) data.weights.push_back(std::exp(0.7 * normal(random)));
  }
  return data;
}

design::Folds folds_of(const design::Data& data, std::size_t count, std::size_t repeats) {
  design::FoldRequest request;
  request.count = count;
  request.repeats = repeats;
  return *design::make_folds(all_rows(data.n_rows), request);
}

}  // namespace formsieve::test

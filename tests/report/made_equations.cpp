#include "made_equations.hpp"

#include "model/scorer.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <random>

namespace formsieve::report::test {

namespace {

using forms::Kind;
using model::MeanPart;
using model::Model;
using model::ModelSet;

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

/// Each awkward cell is tried with one response form in so many.
constexpr std::size_t kTurns = 5;

/// The names are awkward on purpose: words of languages, quotes, other letters, two that become one.
std::vector<model::Term> terms() {
  const auto term = [](const char* column, forms::Form form) {
    return model::Term{column, std::move(form), 0.0, 10.0, {}};
  };
  return {term("int", {Kind::ln, {}, {}, 0.5}),
          term("fill %", {Kind::sqrt, {}, 101.0}),
          term("fill-%", {Kind::reciprocal}),
          term("9lives", {Kind::square}),
          term("a\"b", {Kind::power, {1.7}}),
          term("größe", {Kind::asinh}),
          term("EXP", {Kind::logit}),
          term("knots", {Kind::spline, {1.0, 2.0, 4.0, 7.0}}),
          term("kind", {Kind::levels, {}, {}, 0.0, {"a", "b\"'c\\?", "rare"}, {"one of", "others"}}),
          term("lambda", {Kind::yeo_johnson, {0.3}, {}, -4.0}),
          term("bc", {Kind::box_cox, {0.3}}),
          term("bc2", {Kind::box_cox, {-0.7}, {}, 0.25}),
          term("fp", {Kind::fractional_polynomial, {-1.0, 0.5}}),
          term("fp0", {Kind::fractional_polynomial, {0.0, 0.0}}),
          term("arc", {Kind::arcsine_sqrt}),
          term("croot", {Kind::cube_root, {}, {}, -3.0}),
          term("q", {Kind::quadratic}),
          term("e", {Kind::exp, {}, 2.0}),
          term("log_ten", {Kind::log10}),
          term("x", {Kind::reciprocal_square}),
          term("eta", {Kind::identity})};
}

/// Means over e as the rule keeps them, from their definition.
MeanPart part_of(const forms::Form& response, const std::vector<double>& residuals) {
  MeanPart part;
  const double n = static_cast<double>(residuals.size());
  part.smallest = *std::min_element(residuals.begin(), residuals.end());
  part.mean_exp = part.mean_cosh = 0.0;
  for (const double e : residuals) {
    part.first += e / n;
    part.second += e * e / n;
    part.third += e * e * e / n;
    part.mean_exp += (response.kind == Kind::log10 ? std::pow(10.0, e) : std::exp(e)) / n;
    part.mean_cosh += std::cosh(e) / n;
    part.mean_sinh += std::sinh(e) / n;
  }
  part.residuals = residuals;
  return part;
}

Row random_row(std::mt19937_64& random, const Model& model) {
  std::uniform_real_distribution<double> uniform(0.05, 0.95);
  Row row;
  for (const model::Term& term : model.terms) {
    Cell cell;
    if (term.form.kind == Kind::levels) {
      cell.text = std::vector<std::string>{"a", "b\"'c\\?", "one of", "others"}[random() % 4];
    } else {
      const bool share = term.form.kind == Kind::logit || term.form.kind == Kind::arcsine_sqrt;
      cell.value = uniform(random) * (share ? 1.0 : 9.0);
    }
    row.push_back(cell);
  }
  return row;
}

/// What else a cell may hold: nothing, the edges of the domain and their neighbours, far away, other texts.
std::vector<Cell> spoilt_cells(const model::Term& term) {
  std::vector<Cell> cells = {{kNaN, "", true}};
  if (term.form.kind == Kind::levels) {
    for (const char* text : {"A", "rare", "unknown", "b"}) cells.push_back({0.0, text, false});
    return cells;
  }
  const forms::Interval domain = forms::domain(term.form);
  for (const double edge : {domain.lower, domain.upper, 0.0}) {
    if (!std::isfinite(edge)) continue;
    for (const double value : {edge, std::nextafter(edge, -1e9), std::nextafter(edge, 1e9), edge - 0.5, edge + 0.5})
      cells.push_back({value == 0.0 ? 0.0 : value, "", false});
  }
  for (const double knot : term.form.parameters) cells.push_back({knot, "", false});
  cells.push_back({-1e9, "", false});
  cells.push_back({40.0, "", false});
  return cells;
}

double code_of(const forms::Form& form, const Cell& cell) {
  if (cell.missing) return kNaN;
  if (form.kind != Kind::levels) return cell.value;
  const auto code = forms::level_code(form, cell.text);
  return code ? static_cast<double>(*code) : model::kUnknownLevel;
}

double plain_eta(const Model& model, const Row& row) {
  double eta = model.coefficients.front();
  std::size_t at = 1;
  for (std::size_t t = 0; t < row.size(); ++t) {
    std::vector<double> columns(forms::n_columns(model.terms[t].form));
    forms::evaluate(model.terms[t].form, code_of(model.terms[t].form, row[t]), columns);
    for (const double column : columns) eta += model.coefficients[at++] * column;
  }
  return eta;
}

void score(Case& one) {
  const model::Scorer scorer(one.model());
  model::Scorer::Workspace work(scorer);
  model::Scores scores;
  for (const Row& row : one.rows) {
    std::vector<std::vector<double>> columns;
    for (std::size_t t = 0; t < row.size(); ++t) columns.push_back({code_of(one.model().terms[t].form, row[t])});
    scorer.score(std::vector<std::span<const double>>(columns.begin(), columns.end()), {}, 1, work, scores);
    one.expected.push_back(scores.mean[0]);
    one.median.push_back(scores.median[0]);
    one.eta.push_back(plain_eta(one.model(), row));
  }
}

Case made_case(std::mt19937_64& random, const forms::Form& response, std::size_t number, std::size_t parts = 1) {
  std::normal_distribution<double> normal;
  Model model;
  model.rank = number;
  model.equation = "printed equation\\";
  model.marks = {"best"};
  model.response = response;
  model.terms = terms();
  std::size_t p = 1;
  for (const model::Term& term : model.terms) p += forms::n_columns(term.form);
  const bool small = response.kind == Kind::sqrt || response.kind == Kind::arcsine_sqrt;
  model.coefficients.push_back(small ? 0.8 : 2.0);
  for (std::size_t j = 1; j < p; ++j) model.coefficients.push_back(0.01 * normal(random));
  model.root.assign(p * (p + 1) / 2, 0.0);
  model.sigma = 0.3;
  model.n = 100;
  for (std::size_t i = 0; i < parts; ++i) {
    std::vector<double> residuals;
    for (int j = 0; j < 40; ++j) residuals.push_back((0.2 + 0.1 * static_cast<double>(i)) * normal(random));
    model.mean.parts.push_back(part_of(response, residuals));
    if (i > 0) model.mean.cuts.push_back(1.7 + 0.3 * static_cast<double>(i));
  }
  Case one{{"0.1.0", "y" + std::to_string(number), "", {model}}, 1.25, {}, {}, {}, {}};
  for (int i = 0; i < 10; ++i) one.rows.push_back(random_row(random, model));
  // Every cell with some of the response forms: all with all would take the interpreters half a minute.
  std::size_t turn = number;
  for (std::size_t t = 0; t < model.terms.size(); ++t)
    for (const Cell& cell : spoilt_cells(model.terms[t])) {
      if (++turn % kTurns != 0) continue;
      one.rows.push_back(random_row(random, model));
      one.rows.back()[t] = cell;
    }
  REQUIRE(model::check(model).ok());
  score(one);
  return one;
}

std::vector<Case> made_cases() {
  std::mt19937_64 random(20261201);
  const std::vector<forms::Form> responses = {{Kind::identity},
                                              {Kind::ln},
                                              {Kind::ln, {}, {}, 2.0},
                                              {Kind::ln, {}, 5000.0},
                                              {Kind::log10},
                                              {Kind::sqrt},
                                              {Kind::cube_root},
                                              {Kind::asinh},
                                              {Kind::reciprocal},
                                              {Kind::reciprocal_sqrt},
                                              {Kind::reciprocal_square, {}, {}, -1.5},
                                              {Kind::square},
                                              {Kind::cube},
                                              {Kind::logit},
                                              {Kind::arcsine_sqrt},
                                              {Kind::exp},
                                              {Kind::power, {0.3}},
                                              {Kind::power, {5.0}},
                                              {Kind::power, {-0.4}},
                                              {Kind::box_cox, {0.0}},
                                              {Kind::box_cox, {0.3}},
                                              {Kind::box_cox, {-0.5}},
                                              {Kind::box_cox, {1e-9}},
                                              {Kind::yeo_johnson, {0.0}},
                                              {Kind::yeo_johnson, {2.5}}};
  std::vector<Case> cases;
  for (const forms::Form& response : responses) cases.push_back(made_case(random, response, cases.size()));
  cases.push_back(made_case(random, {Kind::ln}, cases.size(), 3));
  cases.push_back(made_case(random, {Kind::sqrt}, cases.size(), 3));
  Case factor = made_case(random, {Kind::ln}, cases.size());
  factor.set.models.front().mean.parts.front().factor = 1.5;
  factor.expected.clear();
  factor.median.clear();
  factor.eta.clear();
  score(factor);
  cases.push_back(factor);
  return cases;
}

}  // namespace

const std::vector<Case>& cases() {
  static const std::vector<Case> kCases = made_cases();
  return kCases;
}

}  // namespace formsieve::report::test

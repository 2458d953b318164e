#include "report/code_formula.hpp"

#include "report/code_forms.hpp"

#include <algorithm>
#include <cmath>

namespace formsieve::report {

namespace {

using forms::Kind;

const Input& input_of(const std::vector<Input>& inputs, const std::string& column) {
  return *std::find_if(inputs.begin(), inputs.end(), [&](const Input& input) { return input.column == column; });
}

/// Builds the mean of one part of the rule after another.
class MeanWriter {
 public:
  MeanWriter(const model::Model& model, Expression eta, bool has_residuals, std::optional<double> factor)
      : model_(model),
        eta_(std::move(eta)),
        kind_(plain_kind(model.response)),
        has_residuals_(has_residuals),
        factor_(factor) {}

  Result<MeanFormula> run() {
    const model::MeanRule& rule = model_.mean;
    formula_.mean = of_part(rule.parts.back());
    for (std::size_t i = rule.cuts.size(); i-- > 0;)
      formula_.mean = choose(less_or_equal(eta_, number(rule.cuts[i])), of_part(rule.parts[i]), formula_.mean);
    if (!possible_)
      return Error{ErrorKind::usage, "the mean of this candidate has no closed form that could be written there", "",
                   "give --as c or --as python, which average over the residuals"};
    return formula_;
  }

 private:
  Expression of_part(const model::MeanPart& part) {
    if (part.factor) return number(*part.factor) * uncorrected();
    switch (kind_) {
      case Kind::identity:
        return own_units(model_.response, part.first == 0.0 ? eta_ : eta_ + number(part.first));
      case Kind::cube_root:
        return own_units(model_.response, mean_cube(part));
      case Kind::ln:
        return own_units(model_.response, number(part.mean_exp) * call(Operation::exp, eta_));
      case Kind::log10:
        return own_units(model_.response, number(part.mean_exp) * call(Operation::power, number(10.0), eta_));
      case Kind::asinh:
        return own_units(model_.response, call(Operation::sinh, eta_) * number(part.mean_cosh) +
                                              call(Operation::cosh, eta_) * number(part.mean_sinh));
      case Kind::sqrt:
        return mean_square(part);
      default:
        return has_residuals_ ? averaged(part) : approximate();
    }
  }

  Expression uncorrected() const { return own_units(model_.response, inverse_formula(model_.response, eta_)); }

  Expression mean_cube(const model::MeanPart& part) const {
    const Expression inner = (eta_ + number(3.0 * part.first)) * eta_ + number(3.0 * part.second);
    return inner * eta_ + number(part.third);
  }

  /// Where an argument η + e is negative it counts as 0, and the moments do not hold.
  Expression mean_square(const model::MeanPart& part) {
    const Expression closed = eta_ * (eta_ + number(2.0 * part.first)) + number(part.second);
    if (!has_residuals_)
      note("Blank where the form-scale prediction is below " + shortest(-part.smallest) +
           ": the mean there takes the residuals; --as c and --as python have them.");
    const Expression below = has_residuals_ ? averaged(part) : undefined();
    return choose(less_or_equal(number(0.0), eta_ + number(part.smallest)), own_units(model_.response, closed), below);
  }

  /// The mean over the residuals kept; none where the uncorrected prediction is undefined.
  Expression averaged(const model::MeanPart& part) {
    formula_.residuals.push_back(part.residuals);
    Expression mean = call(Operation::mean_over, eta_);
    mean.name = residuals_name(formula_.residuals.size() - 1);
    mean = own_units(model_.response, mean);
    const forms::Interval image = forms::inverse_domain(model_.response);
    if (std::isfinite(image.upper) && !image.upper_closed)
      mean = choose(less_or_equal(number(image.upper), eta_), undefined(), mean);
    if (std::isfinite(image.lower) && !image.lower_closed)
      mean = choose(less_or_equal(eta_, number(image.lower)), undefined(), mean);
    return mean;
  }

  Expression approximate() {
    possible_ = possible_ && model_.mean.parts.size() == 1 && factor_ && std::isfinite(*factor_);
    if (!possible_) return undefined();
    note("An approximation: the uncorrected prediction times " + shortest(*factor_) +
         ", the ratio of the corrected to the uncorrected predictions over the rows of the search. The exact mean is "
         "an average over the residuals of the fit; --as c and --as python have it.");
    return number(*factor_) * uncorrected();
  }

  void note(const std::string& sentence) {
    if (std::find(formula_.notes.begin(), formula_.notes.end(), sentence) == formula_.notes.end())
      formula_.notes.push_back(sentence);
  }

  const model::Model& model_;
  Expression eta_;
  Kind kind_;
  bool has_residuals_;
  std::optional<double> factor_;
  MeanFormula formula_;
  bool possible_ = true;
};

}  // namespace

std::vector<Input> inputs_of(const model::Model& model) {
  std::vector<Input> inputs;
  for (const model::Term& term : model.terms) {
    const auto same = [&](const Input& input) { return input.column == term.column; };
    if (std::none_of(inputs.begin(), inputs.end(), same))
      inputs.push_back({term.column, "", term.form.kind == Kind::levels});
  }
  return inputs;
}

std::string residuals_name(std::size_t place) { return "formsieve_residuals_" + std::to_string(place + 1); }

Expression defined_formula(const model::Model& model, const std::vector<Input>& inputs) {
  std::vector<Expression> conditions;
  for (const model::Term& term : model.terms)
    conditions.push_back(defined_where(term.form, variable(input_of(inputs, term.column).name)));
  if (conditions.empty()) conditions.push_back(less(number(0.0), number(1.0)));  // a model of the intercept alone
  return all_of(std::move(conditions));
}

Expression eta_formula(const model::Model& model, const std::vector<Input>& inputs) {
  Expression eta = number(model.coefficients.front());
  std::size_t at = 1;
  for (const model::Term& term : model.terms) {
    for (const Expression& column : column_formulas(term.form, variable(input_of(inputs, term.column).name))) {
      const double coefficient = model.coefficients[at++];
      eta = coefficient < 0.0 ? eta - number(-coefficient) * column : eta + number(coefficient) * column;
    }
  }
  return eta;
}

Result<MeanFormula> mean_formula(const model::Model& model, const Expression& eta, bool has_residuals,
                                 const std::optional<double>& smearing_factor) {
  return MeanWriter(model, eta, has_residuals, smearing_factor).run();
}

}  // namespace formsieve::report

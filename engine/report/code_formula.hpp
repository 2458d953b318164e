// A kept model as formulas: design columns to form-scale prediction to mean in own units. Private to room report.
#pragma once

#include "report/code_expression.hpp"

#include <formsieve/base.hpp>
#include <formsieve/model.hpp>

#include <optional>
#include <string>
#include <vector>

namespace formsieve::report {

/// A column that the equation needs, and what the formulas call it.
struct Input {
  std::string column, name;
  bool is_text = false;
};

/// The columns in the order of the terms, each once; names are left empty.
std::vector<Input> inputs_of(const model::Model& model);

struct MeanFormula {
  Expression mean;
  std::vector<std::vector<double>> residuals;  ///< what mean_over names: residuals_name(place)
  std::vector<std::string> notes;              ///< where it stands for less than the rule, as sentences
};

std::string residuals_name(std::size_t place);

/// What must hold of the inputs for a prediction; at least one condition.
Expression defined_formula(const model::Model& model, const std::vector<Input>& inputs);

/// The form-scale prediction η of a row for which the condition above holds.
Expression eta_formula(const model::Model& model, const std::vector<Input>& inputs);

/// The mean in own units from η, for a row of weight 1, as model::Mean has it. Without residuals in the language a mean
/// without a closed form is `smearing_factor` times the uncorrected prediction. Errors (kind usage): that cannot be
/// done either; the hint names the languages that can.
Result<MeanFormula> mean_formula(const model::Model& model, const Expression& eta, bool has_residuals,
                                 const std::optional<double>& smearing_factor);

}  // namespace formsieve::report

// One writer a language. Private to room report.
#pragma once

#include <formsieve/base.hpp>
#include <formsieve/model.hpp>

#include <optional>
#include <string>

namespace formsieve::report {

/// A model that passes model::check, and what else is known of it.
struct CodeRequest {
  const model::ModelSet& set;
  const model::Model& model;
  std::optional<double> smearing_factor;  ///< ratio of corrected to uncorrected predictions over the rows in use
};

// Each returns the whole text, a newline at its end. Errors (kind usage): the language cannot say it.
Result<std::string> code_in_text(const CodeRequest& request);
Result<std::string> code_in_spreadsheet(const CodeRequest& request);
Result<std::string> code_in_sql(const CodeRequest& request);
Result<std::string> code_in_c(const CodeRequest& request);
Result<std::string> code_in_python(const CodeRequest& request);

}  // namespace formsieve::report

#include <formsieve/report.hpp>

#include "report/code_languages.hpp"

namespace formsieve::report {

Result<std::string> equation_code(const model::ModelSet& set, const model::Model& model, CodeLanguage language,
                                  const std::optional<double>& smearing_factor) {
  const CodeRequest request{set, model, smearing_factor};
  switch (language) {
    case CodeLanguage::spreadsheet:
      return code_in_spreadsheet(request);
    case CodeLanguage::sql:
      return code_in_sql(request);
    case CodeLanguage::c:
      return code_in_c(request);
    case CodeLanguage::python:
      return code_in_python(request);
    default:
      return code_in_text(request);
  }
}

}  // namespace formsieve::report

#include "report/form_reader.hpp"

namespace formsieve::report {

namespace {

/// A form whose parameters do not fit its kind could be neither printed nor evaluated.
bool is_complete(const forms::Form& form) {
  constexpr std::size_t kFewestKnots = 3;
  const std::size_t n = form.parameters.size();
  switch (form.kind) {
    case forms::Kind::power:
    case forms::Kind::box_cox:
    case forms::Kind::yeo_johnson:
      return n == 1;
    case forms::Kind::fractional_polynomial:
      return n == 2;
    case forms::Kind::spline:
      return n >= kFewestKnots;
    case forms::Kind::levels:
      return n == 0 && form.levels.size() >= 2;
    default:
      return n == 0;
  }
}

}  // namespace

forms::Form read_form(const Node& node) {
  forms::Form form;
  const Node name = node.at("form");
  const std::string word = name.text();
  const auto kind = forms::kind_from_name(word);
  if (kind) form.kind = *kind;
  if (!kind && name.present()) name.report("is '" + word + "', which is not a form");
  const Node parameter = node.at("parameter");
  if (parameter.is_list())
    for (const Node& item : parameter.items()) form.parameters.push_back(item.number());
  else if (const auto value = parameter.optional_number())
    form.parameters = {*value};
  form.reflect = node.at("reflect").optional_number();
  form.shift = node.at("shift").number();
  form.levels = node.get("levels").texts();
  form.pooled = node.get("pooled").texts();
  if (kind && !is_complete(form)) name.report("is '" + word + "', which does not go with its parameters or levels");
  return form;
}

}  // namespace formsieve::report

// The equation as a mathematician writes it, with every digit.
#include "report/code_comments.hpp"
#include "report/code_forms.hpp"
#include "report/code_languages.hpp"

#include <cmath>

namespace formsieve::report {

namespace {

using forms::Kind;

std::string signed_number(double value) { return (std::signbit(value) ? "−" : "") + shortest(std::fabs(value)); }
std::string added(double value) { return (value < 0.0 ? " − " : " + ") + shortest(std::fabs(value)); }

std::string eta_text(const model::Model& model) {
  std::string text = signed_number(model.coefficients.front());
  std::size_t at = 1;
  for (const model::Term& term : model.terms)
    for (std::size_t k = 0; k < forms::n_columns(term.form); ++k) {
      const std::string label = forms::label(term.form, term.column, k);
      text += added(model.coefficients[at++]) + "·" + (term.form.kind == Kind::levels ? "[" + label + "]" : label);
    }
  return text;
}

/// The mean of the argument u, before reflection and shift; empty without a closed form.
std::string closed_text(const forms::Form& response, const model::MeanPart& part) {
  switch (plain_kind(response)) {
    case Kind::identity:
      return part.first == 0.0 ? "η" : "(η" + added(part.first) + ")";
    case Kind::ln:
      return shortest(part.mean_exp) + "·exp(η)";
    case Kind::log10:
      return shortest(part.mean_exp) + "·10^η";
    case Kind::sqrt:
      return "(η²" + added(2.0 * part.first) + "·η" + added(part.second) + ")";
    case Kind::cube_root:
      return "(η³" + added(3.0 * part.first) + "·η²" + added(3.0 * part.second) + "·η" + added(part.third) + ")";
    case Kind::asinh:
      return "(" + shortest(part.mean_cosh) + "·sinh(η)" + added(part.mean_sinh) + "·cosh(η))";
    default:
      return {};
  }
}

std::string in_own_units(const forms::Form& response, const std::string& u) {
  if (response.reflect) return signed_number(*response.reflect + response.shift) + " − " + u;
  return response.shift == 0.0 ? u : u + added(-response.shift);
}

std::string residuals_text(const model::MeanPart& part) {
  std::string text;
  for (const double e : part.residuals) text += (text.empty() ? "" : ", ") + signed_number(e);
  return text;
}

std::string averaged_text(const forms::Form& response, const model::MeanPart& part) {
  return "the mean of " + forms::inverse_label(response, "η + e") + " over e = " + residuals_text(part);
}

std::string part_text(const forms::Form& response, const model::MeanPart& part) {
  if (part.factor) {
    const std::string plain = forms::inverse_label(response, "η");
    return shortest(*part.factor) + "·(" + plain + ")";
  }
  const std::string closed = closed_text(response, part);
  if (closed.empty()) return averaged_text(response, part);
  if (plain_kind(response) != Kind::sqrt) return in_own_units(response, closed);
  return in_own_units(response, closed) + " where η ≥ " + signed_number(-part.smallest) + ", else " +
         averaged_text(response, part) + ", arguments η + e below 0 counted as 0";
}

std::string mean_text(const model::ModelSet& set, const model::Model& model) {
  const model::MeanRule& rule = model.mean;
  if (rule.cuts.empty()) return set.response + " = " + part_text(model.response, rule.parts.front()) + "\n";
  std::string text;
  for (std::size_t i = 0; i < rule.parts.size(); ++i) {
    const std::string where =
        i < rule.cuts.size() ? "η ≤ " + signed_number(rule.cuts[i]) : "η > " + signed_number(rule.cuts.back());
    text += (i == 0 ? set.response : "or, where no line above holds, " + set.response) + " = " +
            part_text(model.response, rule.parts[i]) + ", for " + where + "\n";
  }
  return text;
}

/// What the short names of forms stand for.
std::vector<std::string> definitions(const model::Model& model) {
  bool has_spline = false, has_yeo_johnson = model.response.kind == Kind::yeo_johnson;
  for (const model::Term& term : model.terms) {
    has_spline = has_spline || term.form.kind == Kind::spline;
    has_yeo_johnson = has_yeo_johnson || term.form.kind == Kind::yeo_johnson;
  }
  std::vector<std::string> lines;
  if (has_spline)
    lines.push_back(
        "splinej(u; t1, …, tk) = ((u − tj)₊³ − (u − tb)₊³·(tk − tj)/(tk − tb) + (u − tk)₊³·(tb − tj)/(tk − "
        "tb))/(tk − t1)², b = k − 1, (a)₊ = a where positive, else 0.");
  if (has_yeo_johnson)
    lines.push_back(
        "YJ(u; λ) = ((1 + u)^λ − 1)/λ for u ≥ 0 (ln(1 + u) at λ = 0), else −((1 − u)^(2 − λ) − 1)/(2 − λ) "
        "(−ln(1 − u) at λ = 2).");
  return lines;
}

}  // namespace

Result<std::string> code_in_text(const CodeRequest& request) {
  const std::vector<std::string> lines = comment_lines(request.set, request.model, {}, definitions(request.model));
  return mean_text(request.set, request.model) + "where η = " + eta_text(request.model) + "\n\n" +
         commented(lines, "# ");
}

}  // namespace formsieve::report

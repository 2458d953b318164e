// Whether a record of a model hangs together, and finding one among several.
#include "model/scorer.hpp"

#include <algorithm>
#include <array>
#include <cmath>

namespace formsieve::model {

namespace {

bool all_finite(const std::vector<double>& values) {
  return std::all_of(values.begin(), values.end(), [](double value) { return std::isfinite(value); });
}

Error broken(const Model& model, const std::string& what) {
  return {ErrorKind::data, "the model of rank " + std::to_string(model.rank) + " " + what, "",
          "the file was changed or cut short; run the search again"};
}

std::size_t n_columns_of(const Model& model) {
  std::size_t p = 1;
  for (const Term& term : model.terms) p += forms::n_columns(term.form);
  return p;
}

Status check_terms(const Model& model) {
  if (const Status status = forms::check(model.response); !status) return broken(model, "has a broken response form");
  if (!forms::invertible(model.response)) return broken(model, "has a response form that has no inverse");
  for (const Term& term : model.terms) {
    if (const Status status = forms::check(term.form); !status)
      return broken(model, "has a broken form for '" + term.column + "'");
    const bool has_range = std::isfinite(term.seen_min) && std::isfinite(term.seen_max);
    if (term.form.kind != forms::Kind::levels && !has_range)
      return broken(model, "does not say which values '" + term.column + "' had");
  }
  return {};
}

Status check_folds(const Model& model) {
  for (const Fold& fold : model.folds) {
    if (fold.coefficients.size() != model.coefficients.size() || !all_finite(fold.coefficients))
      return broken(model, "has a fold with other coefficients than its own");
    if (!std::is_sorted(fold.residuals.begin(), fold.residuals.end()) || !all_finite(fold.residuals))
      return broken(model, "has held-out residuals that do not rise");
    if (!fold.counts.empty() && fold.counts.size() != fold.residuals.size())
      return broken(model, "has held-out residuals without counts");
  }
  return {};
}

Status check_mean(const Model& model) {
  const MeanRule& rule = model.mean;
  if (rule.parts.size() != rule.cuts.size() + 1 || !std::is_sorted(rule.cuts.begin(), rule.cuts.end()))
    return broken(model, "has a rule for the mean with other parts than cuts");
  for (const MeanPart& part : rule.parts)
    if (!all_finite(part.residuals) || (!part.factor && part.residuals.empty()))
      return broken(model, "has a rule for the mean without residuals");
  return {};
}

}  // namespace

const char* flag_name(std::size_t bit) {
  static constexpr std::array<const char*, kFlags> kNames = {"missing",  "unknown level", "undefined",    "outside",
                                                             "leverage", "no mean",       "open interval"};
  return kNames[bit];
}

Status check(const Model& model) {
  if (Status status = check_terms(model); !status) return status;
  const std::size_t p = n_columns_of(model);
  if (model.coefficients.size() != p || !all_finite(model.coefficients))
    return broken(model, "has " + std::to_string(model.coefficients.size()) + " coefficients where its terms need " +
                             std::to_string(p));
  if (model.root.size() != p * (p + 1) / 2 || !all_finite(model.root))
    return broken(model, "has no whole root of its covariance");
  if (model.n < p) return broken(model, "has fewer rows than coefficients");
  if (Status status = check_folds(model); !status) return status;
  return check_mean(model);
}

Result<const Model*> find_model(const ModelSet& set, const std::string& rank_or_mark) {
  std::string known;
  for (const Model& model : set.models) {
    if (std::to_string(model.rank) == rank_or_mark) return &model;
    if (std::find(model.marks.begin(), model.marks.end(), rank_or_mark) != model.marks.end()) return &model;
    known += (known.empty() ? "" : ", ") + std::to_string(model.rank);
    for (const std::string& mark : model.marks) known += " (" + mark + ")";
  }
  return Error{ErrorKind::usage, "the run has no model of rank '" + rank_or_mark + "'", "",
               "give one of the ranks " + known + ", or the name of a line"};
}

}  // namespace formsieve::model

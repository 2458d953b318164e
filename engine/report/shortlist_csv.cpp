// shortlist.csv: one line a candidate, for spreadsheets. RFC 4180, decimal point, empty where there is no value.
#include <formsieve/report.hpp>

#include <array>
#include <charconv>
#include <cmath>
#include <functional>
#include <optional>
#include <string>
#include <vector>

namespace formsieve::report {

namespace {

using judge::Candidate;

std::string field(const std::string& text) {
  if (text.find_first_of(",\"\r\n") == std::string::npos) return text;
  std::string out = "\"";
  for (const char c : text) {
    if (c == '"') out += '"';
    out += c;
  }
  return out.append("\"");
}

/// The shortest digits that read back as the same double; empty when it is not finite.
std::string number(double value) {
  if (!std::isfinite(value)) return {};
  std::array<char, 32> buffer{};
  const auto [end, code] = std::to_chars(buffer.data(), buffer.data() + buffer.size(), value);
  return {buffer.data(), end};
}

std::string number(const std::optional<double>& value) { return value ? number(*value) : std::string(); }

template <class Items, class Text>
std::string joined(const Items& items, const char* between, Text&& text) {
  std::string out;
  for (const auto& item : items) {
    const std::string word = text(item);
    if (!out.empty() && !word.empty()) out += between;
    out += word;
  }
  return out;
}

std::string as_is(const std::string& text) { return text; }

std::string failed_checks(const Candidate& candidate) {
  return joined(candidate.checks, "; ", [](const auto& check) { return check.passes ? std::string() : check.name; });
}

std::string terms_text(const Candidate& candidate) {
  return joined(candidate.terms, " + ", [](const auto& term) { return forms::term_name(term.form, term.column); });
}

struct Column {
  std::string name;
  std::function<std::string(const Candidate&)> value;
};

std::vector<Column> identity_columns() {
  return {{"rank", [](const Candidate& c) { return std::to_string(c.rank); }},
          {"candidate", [](const Candidate& c) { return c.number; }},
          {"marks", [](const Candidate& c) { return joined(c.marks, "; ", as_is); }},
          {"response", [](const Candidate& c) { return forms::label(c.response, c.response_column); }},
          {"n_terms", [](const Candidate& c) { return std::to_string(c.terms.size()); }},
          {"n_coefficients", [](const Candidate& c) { return std::to_string(c.coefficients.size()); }},
          {"terms", terms_text},
          {"equation", [](const Candidate& c) { return c.equation; }}};
}

std::vector<Column> score_columns() {
  return {{"n", [](const Candidate& c) { return std::to_string(c.n); }},
          {"cv_rmse", [](const Candidate& c) { return number(c.cv.rmse); }},
          {"cv_rmse_se", [](const Candidate& c) { return number(c.cv.rmse_se); }},
          {"cv_bias", [](const Candidate& c) { return number(c.cv.bias); }},
          {"cv_mae", [](const Candidate& c) { return number(c.cv.mae); }},
          {"cv_mae_median", [](const Candidate& c) { return number(c.cv.mae_median); }},
          {"cv_rmse_naive", [](const Candidate& c) { return number(c.cv.rmse_naive); }},
          {"cv_rmse_form_scale", [](const Candidate& c) { return number(c.cv.rmse_form_scale); }},
          {"log_likelihood", [](const Candidate& c) { return number(c.likelihood.log_likelihood); }},
          {"aic", [](const Candidate& c) { return number(c.likelihood.aic); }},
          {"aicc", [](const Candidate& c) { return number(c.likelihood.aicc); }},
          {"bic", [](const Candidate& c) { return number(c.likelihood.bic); }},
          {"r_squared_form_scale", [](const Candidate& c) { return number(c.r2_form_scale); }},
          {"r_squared_own_units", [](const Candidate& c) { return number(c.r2_own_units); }},
          {"rss", [](const Candidate& c) { return number(c.rss); }},
          {"sigma", [](const Candidate& c) { return number(c.sigma); }},
          {"smearing_factor", [](const Candidate& c) { return number(c.back.smearing_factor); }},
          {"checks_failed", failed_checks},
          {"cautions", [](const Candidate& c) { return joined(c.cautions, "; ", as_is); }}};
}

/// After the predictors' terms, whose number changes: what came later goes last.
std::vector<Column> family_columns() {
  return {{"pareto", [](const Candidate& c) { return std::string(c.pareto ? "yes" : "no"); }},
          {"n_siblings", [](const Candidate& c) { return std::to_string(c.siblings.size()); }},
          {"siblings", [](const Candidate& c) { return joined(c.siblings, "; ", as_is); }}};
}

/// One column a predictor, holding its term: what a spreadsheet needs to filter by form.
Column predictor_column(const std::string& predictor) {
  return {"term of " + predictor, [predictor](const Candidate& candidate) {
            for (const judge::Term& term : candidate.terms)
              if (term.column == predictor) return forms::term_name(term.form, term.column);
            return std::string();
          }};
}

}  // namespace

std::string shortlist_csv(const judge::Shortlist& shortlist) {
  std::vector<Column> columns = identity_columns();
  for (Column& column : score_columns()) columns.push_back(std::move(column));
  for (const judge::PredictorMenu& menu : shortlist.menus) columns.push_back(predictor_column(menu.column));
  for (Column& column : family_columns()) columns.push_back(std::move(column));
  std::string text;
  const auto line = [&](auto&& cell) {
    for (std::size_t i = 0; i < columns.size(); ++i) {
      if (i > 0) text += ',';
      text += field(cell(columns[i]));
    }
    text += "\r\n";
  };
  line([](const Column& column) { return column.name; });
  for (const Candidate& candidate : shortlist.candidates)
    line([&](const Column& column) { return column.value(candidate); });
  return text;
}

}  // namespace formsieve::report

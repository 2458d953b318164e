// The worked cases of tests/reference/cases as the tests read them: input table, forms evaluated by a few lines of
// their own (an oracle beside the forms room), and every figure by its name.
#pragma once

#include <Eigen/Core>
#include <nlohmann/json.hpp>

#include <algorithm>
#include <cmath>
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <limits>
#include <optional>
#include <stdexcept>
#include <string>
#include <vector>

namespace formsieve::reference {

inline std::filesystem::path folder() { return std::filesystem::path(FORMSIEVE_SOURCE_DIR) / "tests" / "reference"; }

/// A form as the cases write it: u = (anchor − x, if an anchor is given) + shift.
struct FormSpec {
  std::string form;
  std::optional<double> lambda, anchor;
  double shift = 0.0;

  explicit FormSpec(const nlohmann::json& j) : form(j.at("form").get<std::string>()) {
    if (j.contains("lambda") && !j["lambda"].is_null()) lambda = j["lambda"].get<double>();
    if (j.contains("anchor") && !j["anchor"].is_null()) anchor = j["anchor"].get<double>();
    if (j.contains("shift") && !j["shift"].is_null()) shift = j["shift"].get<double>();
  }

  double value(double x) const {
    const long double u = (anchor ? static_cast<long double>(*anchor) - x : static_cast<long double>(x)) + shift;
    if (form == "identity") return static_cast<double>(u);
    if (form == "square") return static_cast<double>(u * u);
    if (form == "cube") return static_cast<double>(u * u * u);
    if (form == "sqrt") return static_cast<double>(std::sqrt(u));
    if (form == "cbrt") return static_cast<double>(std::cbrt(u));
    if (form == "ln") return static_cast<double>(std::log(u));
    if (form == "reciprocal") return static_cast<double>(1.0L / u);
    if (form == "rsqrt") return static_cast<double>(1.0L / std::sqrt(u));
    if (form == "boxcox") {
      const long double power = lambda.value();
      return static_cast<double>(power == 0.0L ? std::log(u) : std::expm1(power * std::log(u)) / power);
    }
    throw std::runtime_error("worked case with an unknown form: " + form);
  }
};

class WorkedCase {
 public:
  explicit WorkedCase(const std::filesystem::path& file) : file_(file) {
    std::ifstream(file) >> json_;
    const auto& input = json_.at("input");
    for (const auto& term : input.at("terms")) {
      term_columns_.push_back(term.at("column").get<std::string>());
      terms_.emplace_back(term);
    }
  }

  std::string id() const { return json_.at("id").get<std::string>(); }
  std::string title() const { return json_.at("title").get<std::string>(); }
  bool tagged(const std::string& tag) const {
    const auto& tags = json_.at("tags");
    return std::find(tags.begin(), tags.end(), tag) != tags.end();
  }
  std::size_t extra_parameters() const { return json_.at("input").value("extra_params", std::size_t{0}); }

  FormSpec response_form() const { return FormSpec(json_.at("input").at("response_form")); }
  const std::vector<FormSpec>& terms() const { return terms_; }
  const std::vector<std::string>& term_columns() const { return term_columns_; }

  Eigen::VectorXd column(const std::string& name) const { return vector(json_.at("input").at("data").at(name)); }
  Eigen::VectorXd response_own() const { return column(json_.at("input").at("response").get<std::string>()); }
  Eigen::VectorXd response() const {
    const FormSpec form = response_form();
    return response_own().unaryExpr([&](double y) { return form.value(y); });
  }
  /// Size 0 when there are none.
  Eigen::VectorXd weights() const {
    const auto& w = json_.at("input").at("weights");
    return w.is_null() ? Eigen::VectorXd() : vector(w);
  }
  /// [n × p], intercept first.
  Eigen::MatrixXd design() const {
    Eigen::MatrixXd x = Eigen::MatrixXd::Ones(response_own().size(), static_cast<Eigen::Index>(terms_.size()) + 1);
    for (std::size_t j = 0; j < terms_.size(); ++j) {
      x.col(static_cast<Eigen::Index>(j) + 1) =
          column(term_columns_[j]).unaryExpr([&](double v) { return terms_[j].value(v); });
    }
    return x;
  }
  /// Fold of each row; empty when the case has none.
  std::vector<int> folds() const {
    const auto& f = json_.at("input").at("folds");
    return f.is_null() ? std::vector<int>{} : f.get<std::vector<int>>();
  }

  /// A figure by its dotted name, "likelihood.aic": the 25-digit value where there is one. Unset where the case has
  /// none.
  std::optional<double> figure(const std::string& name) const {
    if (const auto& mp = json_.at("mp"); mp.contains(name) && !mp[name].is_null()) return number(mp[name]);
    const nlohmann::json* value = find(name);
    return value == nullptr || value->is_null() ? std::nullopt : std::optional(number(*value));
  }
  std::vector<double> figures(const std::string& name) const {
    const auto& mp = json_.at("mp");
    const nlohmann::json* values = mp.contains(name) ? &mp[name] : find(name);
    if (values == nullptr) throw std::runtime_error(id() + " has no " + name);
    std::vector<double> result;
    for (const auto& v : *values) result.push_back(number(v));
    return result;
  }

 private:
  static double number(const nlohmann::json& v) {
    return v.is_string() ? std::strtod(v.get<std::string>().c_str(), nullptr) : v.get<double>();
  }
  static Eigen::VectorXd vector(const nlohmann::json& values) {
    const auto held = values.get<std::vector<double>>();
    return Eigen::Map<const Eigen::VectorXd>(held.data(), static_cast<Eigen::Index>(held.size()));
  }
  const nlohmann::json* find(const std::string& name) const {
    const nlohmann::json* at = &json_.at("output");
    for (std::size_t start = 0; start <= name.size();) {
      const std::size_t dot = std::min(name.find('.', start), name.size());
      const std::string key = name.substr(start, dot - start);
      if (!at->is_object() || !at->contains(key)) return nullptr;
      at = &at->at(key);
      start = dot + 1;
    }
    return at;
  }

  std::filesystem::path file_;
  nlohmann::json json_;
  std::vector<FormSpec> terms_;
  std::vector<std::string> term_columns_;
};

/// All cases, in the order of their names.
inline std::vector<WorkedCase> worked_cases() {
  std::vector<std::filesystem::path> files;
  for (const auto& entry : std::filesystem::directory_iterator(folder() / "cases")) {
    if (entry.path().extension() == ".json") files.push_back(entry.path());
  }
  std::sort(files.begin(), files.end());
  std::vector<WorkedCase> cases;
  for (const auto& file : files) cases.emplace_back(file);
  if (cases.empty()) throw std::runtime_error("no worked cases in " + folder().string());
  return cases;
}

/// |a − b| over the larger of them; 0 when equal (NaN or infinite alike), +∞ when one alone is NaN.
inline double relative_difference(double a, double b) {
  if (a == b || (std::isnan(a) && std::isnan(b))) return 0.0;
  const double difference = std::abs(a - b) / std::max(std::abs(a), std::abs(b));
  return std::isnan(difference) ? std::numeric_limits<double>::infinity() : difference;
}

}  // namespace formsieve::reference

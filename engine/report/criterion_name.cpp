#include "report/criterion_name.hpp"

#include <algorithm>

namespace formsieve::report {

std::string criterion_text(judge::Criterion criterion) {
  const auto named = [&](const auto& entry) { return entry.first == criterion; };
  return std::string(std::find_if(kCriterionNames.begin(), kCriterionNames.end(), named)->second);
}

judge::Criterion read_criterion(const Node& node, judge::Criterion when_absent) {
  if (!node.present()) return when_absent;
  const std::string word = node.text();
  for (const auto& [criterion, name] : kCriterionNames)
    if (word == name) return criterion;
  node.report("is '" + word + "', and must be cv_rmse, aic, aicc or bic");
  return when_absent;
}

}  // namespace formsieve::report

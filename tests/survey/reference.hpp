// Figures of single columns from programs outside the project; see tests/reference/survey/make_column_statistics.py.
#pragma once

#include <fstream>
#include <nlohmann/json.hpp>
#include <string>
#include <vector>

namespace formsieve::survey::testing {

inline nlohmann::json read_json(const std::string& path_in_reference) {
  std::ifstream file(std::string(FORMSIEVE_SOURCE_DIR) + "/tests/reference/" + path_in_reference);
  return nlohmann::json::parse(file);
}

/// Name → { values, mean, sd, skewness_G1, … }.
inline nlohmann::json column_statistics() { return read_json("survey/column_statistics.json").at("columns"); }

inline std::vector<double> values_of(const nlohmann::json& column) {
  return column.at("values").get<std::vector<double>>();
}

}  // namespace formsieve::survey::testing

// Small invented tables for running the program on.
#pragma once

#include <cmath>
#include <cstdio>
#include <string>

namespace formsieve::cli::testing {

/// A number in [0, 1) for row i and column j: fractional parts of multiples of irrational numbers, so that the table is
/// the same everywhere.
inline double spread_out(int i, int j) {
  const double value = (i + 1) * std::sqrt(2.0 + 3.0 * j) + 0.37 * j;
  return value - std::floor(value);
}

/// 120 cold stores: energy grows with area (a power law with multiplicative error) and falls with fill; region is text.
inline std::string stores_csv() {
  std::string text = "energy_kwh,floor_area,fill_percent,door_openings,region\n";
  for (int i = 0; i < 120; ++i) {
    const double area = 40.0 * std::exp(3.0 * spread_out(i, 0));
    const double fill = 100.0 - 60.0 * spread_out(i, 1) * spread_out(i, 1);
    const double doors = std::floor(20.0 * spread_out(i, 2));
    const double noise = 0.2 * (spread_out(i, 3) + spread_out(i, 4) + spread_out(i, 5) - 1.5);
    const double energy = std::exp(4.0 + 0.8 * std::log(area) - 0.08 * std::sqrt(101.0 - fill) + noise);
    char line[160];
    std::snprintf(line, sizeof line, "%.1f,%.1f,%.1f,%.0f,%s\n", energy, area, fill, doors,
                  i % 3 == 0   ? "coast"
                  : i % 3 == 1 ? "hills"
                               : "river");
    text += line;
  }
  return text;
}

/// A table whose default search takes hours on any machine: 60 rows, 16 positive predictors.
inline std::string endless_csv() {
  std::string text = "y";
  for (int j = 1; j <= 16; ++j) text += ",x" + std::to_string(j);
  text += "\n";
  for (int i = 0; i < 60; ++i) {
    for (int j = 0; j <= 16; ++j) {
      char cell[32];
      std::snprintf(cell, sizeof cell, "%s%.3f", j == 0 ? "" : ",", std::exp(2.0 * spread_out(i, j)));
      text += cell;
    }
    text += "\n";
  }
  return text;
}

}  // namespace formsieve::cli::testing

// Comparing figures with those of a worked case, and the table of what is reached.
#pragma once

#include "reference/worked_case.hpp"

#include <Eigen/Core>
#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <map>
#include <string>
#include <utility>
#include <vector>

namespace formsieve::reference {

/// Checks figures against a tolerance and keeps the largest relative difference of each.
class Comparison {
 public:
  explicit Comparison(double tolerated) : tolerated_(tolerated) {}

  /// `unit`: differences are taken relative to the largest of both values and this (a bias may be 0 up to rounding).
  void check(const WorkedCase& worked, const std::string& name, double ours, double theirs, double unit = 0.0) {
    const double difference = unit == 0.0
                                  ? relative_difference(ours, theirs)
                                  : std::abs(ours - theirs) / std::max({std::abs(ours), std::abs(theirs), unit});
    INFO(worked.id() << " (" << worked.title() << "): " << name << " " << ours << ", expected " << theirs);
    CHECK(difference <= tolerated_);
    auto& [largest, where] = worst_[name];
    if (!where.empty() && !(difference > largest)) return;
    largest = difference;
    where = worked.id();
  }
  /// A figure of the case, by its name there.
  void check(const WorkedCase& worked, const std::string& name, double ours) {
    check(worked, name, ours, worked.figure(name).value());
  }
  void check(const WorkedCase& worked, const std::string& name, const Eigen::VectorXd& ours) {
    const std::vector<double> theirs = worked.figures(name);
    REQUIRE(ours.size() == static_cast<Eigen::Index>(theirs.size()));
    for (Eigen::Index i = 0; i < ours.size(); ++i) check(worked, name, ours(i), theirs[static_cast<std::size_t>(i)]);
  }

  /// Prints the largest differences.
  void report() const {
    std::string table = "largest relative difference over the worked cases:";
    for (const auto& [name, held] : worst_) {
      char line[120];
      std::snprintf(line, sizeof line, "\n  %-42s %8.1e  %s", name.c_str(), held.first, held.second.c_str());
      table += line;
    }
    WARN(table);
  }

 private:
  double tolerated_;
  std::map<std::string, std::pair<double, std::string>> worst_;
};

}  // namespace formsieve::reference

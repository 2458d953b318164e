// Generated rows for the tests of room design.
#pragma once

#include "design/design.hpp"

#include <cstddef>
#include <cstdint>
#include <random>
#include <string>
#include <vector>

namespace formsieve::test {

double uniform(std::mt19937_64& random);
double normal(std::mt19937_64& random);

forms::Form form(forms::Kind kind);
/// Level indicators, the first the reference.
forms::Form levels(const std::vector<std::string>& names);

/// A skewed positive predictor with four forms of one column, one with identity and quadratic, one of three levels, and
/// a response under identity and ln. Weights on request.
design::Data example_data(std::uint64_t seed, std::size_t n_rows, bool weighted);

/// Shuffled folds of all rows.
design::Folds folds_of(const design::Data& data, std::size_t count, std::size_t repeats = 1);

std::vector<std::size_t> all_rows(std::size_t n);

}  // namespace formsieve::test

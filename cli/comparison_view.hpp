// Candidates side by side as a screen: what differs, by how much, and whether that is more than noise.
#pragma once

#include "terminal.hpp"

#include <formsieve/comparison.hpp>

#include <string>

namespace formsieve::cli {

/// The comparison in the order of the questions that a review asks.
std::string comparison_page(const judge::Comparison& comparison, const std::string& run_folder,
                            const Terminal& terminal);

}  // namespace formsieve::cli

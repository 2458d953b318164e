// The parts of a candidate's page that tell of its examination.
#pragma once

#include "page.hpp"

#include <formsieve/judge.hpp>

#include <optional>
#include <string>

namespace formsieve::cli {

/// Width of the labels of a candidate's page.
inline constexpr std::size_t kLabelWidth = 24;
/// Digits of an error in own units.
inline constexpr int kErrorDigits = 4;

bool is_identity(const forms::Form& form);
std::string optional_figure(const std::optional<double>& value);

/// A mean error, to the decimals that the RMSE beside it has: the rest is noise.
std::string mean_error(const std::optional<double>& value, const std::optional<double>& rmse);

// Each adds one section, or nothing where the candidate has none of it.
void show_intervals(Page& page, const judge::Candidate& candidate);
void show_effects(Page& page, const judge::Candidate& candidate);
void show_checks(Page& page, const judge::Candidate& candidate);
void show_influence(Page& page, const judge::Candidate& candidate);
void show_corrections(Page& page, const judge::Candidate& candidate);

}  // namespace formsieve::cli

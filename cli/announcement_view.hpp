// What a search says before it starts.
#pragma once

#include "terminal.hpp"

#include <formsieve/pipeline.hpp>

#include <string>

namespace formsieve::cli {

/// Candidates counted exactly, rows, folds, the time it will take; then a line for each note (struck and merged forms,
/// dropped rows, folds reduced).
std::string announcement_text(const pipeline::Announcement& announcement, const Terminal& terminal);

}  // namespace formsieve::cli

// A plan as a person would want to find it: every setting with what it does, every menu with what the survey says.
#pragma once

#include <formsieve/run.hpp>

#include "pipeline/prepare.hpp"

#include <cstddef>
#include <map>
#include <optional>
#include <string>

namespace formsieve::pipeline {

/// What a draft says besides the plan and its preparation.
struct DraftFindings {
  std::map<std::string, std::string> set_aside;  ///< columns that cannot serve as predictors → why
  std::size_t n_rows_read = 0;
  std::optional<std::size_t> max_terms;  ///< a limit that keeps the search short, when the whole space would not
  std::string candidates;                ///< of the space as drafted, for reading
};

/// The plan as commented TOML of lines up to kPlanWidth characters (a name or a query may be longer). The settings are
/// those of `plan`; menus are written out as prepared.
std::string draft_text(const run::Plan& plan, const Prepared& prepared, const DraftFindings& findings);

}  // namespace formsieve::pipeline

// The survey as a screen: one line a column, then what each form would do to it.
#pragma once

#include "terminal.hpp"

#include <formsieve/survey.hpp>

#include <string>

namespace formsieve::cli {

std::string survey_page(const survey::Survey& survey, const Terminal& terminal);

}  // namespace formsieve::cli

// The version of the layout of our JSON files. Raised when a key is renamed or changes its meaning, never for new keys.
#pragma once

namespace formsieve::report {

inline constexpr int kShortlistSchema = 1;
inline constexpr int kSurveySchema = 1;

}  // namespace formsieve::report

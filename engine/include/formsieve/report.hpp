// Room report: JSON and CSV of results. Computes nothing. May call: base, result types; forms for printed equations.
#pragma once

#include <formsieve/base.hpp>
#include <formsieve/comparison.hpp>
#include <formsieve/judge.hpp>
#include <formsieve/model.hpp>
#include <formsieve/survey.hpp>

#include <string>

namespace formsieve::report {

/// shortlist.json, schema 1 (design.md, "What a run folder holds"). Doubles read back to the same bits; non-finite
/// values are null.
std::string shortlist_json(const judge::Shortlist& shortlist);
Result<judge::Shortlist> read_shortlist_json(const std::string& text, const std::string& path);

/// models.json, schema 1: what scores new rows, one model a line. Doubles read back to the same bits.
std::string models_json(const model::ModelSet& set);
Result<model::ModelSet> read_models_json(const std::string& text, const std::string& path);

/// One line a candidate, RFC 4180, decimal point.
std::string shortlist_csv(const judge::Shortlist& shortlist);

/// Candidates side by side: `compare --json`.
std::string comparison_json(const judge::Comparison& comparison);

/// survey.json
std::string survey_json(const survey::Survey& survey);

}  // namespace formsieve::report

// Room report: JSON and CSV of results. Computes nothing. May call: base, result types; forms for printed equations.
#pragma once

#include <formsieve/base.hpp>
#include <formsieve/comparison.hpp>
#include <formsieve/judge.hpp>
#include <formsieve/model.hpp>
#include <formsieve/survey.hpp>

#include <optional>
#include <string>

namespace formsieve::report {

/// shortlist.json, schema 1 (design.md, "What a run folder holds"). Doubles read back to the same bits; non-finite
/// values are null.
std::string shortlist_json(const judge::Shortlist& shortlist);
Result<judge::Shortlist> read_shortlist_json(const std::string& text, const std::string& path);

/// models.json, schema 1: what scores new rows, one model a line. Doubles read back to the same bits.
std::string models_json(const model::ModelSet& set);
Result<model::ModelSet> read_models_json(const std::string& text, const std::string& path);

enum class CodeLanguage { text, spreadsheet, sql, c, python };

/// The mean in own units by one kept model, ready to paste: full-precision coefficients, ranges and cautions as
/// comments; an input that is missing or outside a form's domain gives no value (a blank cell, NULL, NAN). `model` must
/// be sound, as pipeline::open_models leaves it. `smearing_factor`: ratio of the corrected to the uncorrected
/// predictions (backtransform::Summary), by which spreadsheet and sql approximate a mean without a closed form. Errors
/// (kind usage): the language cannot say it; the hint names one that can.
Result<std::string> equation_code(const model::ModelSet& set, const model::Model& model, CodeLanguage language,
                                  const std::optional<double>& smearing_factor = {});

/// One line a candidate, RFC 4180, decimal point.
std::string shortlist_csv(const judge::Shortlist& shortlist);

/// Candidates side by side: `compare --json`.
std::string comparison_json(const judge::Comparison& comparison);

/// survey.json
std::string survey_json(const survey::Survey& survey);

}  // namespace formsieve::report

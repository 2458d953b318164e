#include "report/code_comments.hpp"

#include "report/code_names.hpp"

#include <cmath>

namespace formsieve::report {

namespace {

/// Units of x by which a term needs its value bounded: "defined above 0", "defined from 0 to 101".
std::string domain_words(const forms::Interval& domain) {
  std::string words;
  if (std::isfinite(domain.lower)) words += (domain.lower_closed ? " from " : " above ") + shortest(domain.lower);
  if (std::isfinite(domain.upper)) words += (domain.upper_closed ? " up to " : " below ") + shortest(domain.upper);
  return words.empty() ? "" : "; defined" + words;
}

std::string levels_words(const forms::Form& form) {
  std::string words;
  for (std::size_t i = 0; i < form.levels.size(); ++i) {
    const bool is_pool = !form.pooled.empty() && i + 1 == form.levels.size();
    for (const std::string& level : is_pool ? form.pooled : std::vector<std::string>{form.levels[i]})
      words += (words.empty() ? "" : ", ") + level;
  }
  return "one of " + words + "; any other text gives no value";
}

std::string range_line(const model::Term& term, const std::vector<Input>& inputs) {
  std::string line = "  " + term.column;
  for (const Input& input : inputs)
    if (input.column == term.column && input.name != term.column && !input.name.empty())
      line += " (" + input.name + ")";
  line += ": ";
  if (term.form.kind == forms::Kind::levels) return line + levels_words(term.form);
  return line + "seen from " + shortest(term.seen_min) + " to " + shortest(term.seen_max) +
         domain_words(forms::domain(term.form));
}

std::string candidate_line(const model::ModelSet& set, const model::Model& model) {
  std::string line = "Rank " + std::to_string(model.rank);
  for (std::size_t i = 0; i < model.marks.size(); ++i) line += (i == 0 ? " (" : ", ") + model.marks[i];
  if (!model.marks.empty()) line += ")";
  return line + " of a run of formsieve " + set.formsieve + ", fitted to " + std::to_string(model.n) + " rows.";
}

}  // namespace

std::vector<std::string> comment_lines(const model::ModelSet& set, const model::Model& model,
                                       const std::vector<Input>& inputs, const std::vector<std::string>& notes) {
  std::vector<std::string> lines = {candidate_line(set, model), model.equation};
  lines.push_back("The value is the mean of " + set.response + " in its own units, corrected for the way back by " +
                  model.mean.method + "; a missing or undefined input gives no value.");
  if (!set.weight.empty()) lines.push_back("For a row of weight 1 (column " + set.weight + ").");
  if (!model.terms.empty()) lines.push_back("Inputs and what the rows of the fit had:");
  for (const model::Term& term : model.terms) lines.push_back(range_line(term, inputs));
  lines.push_back("Do not use it outside these ranges: a value is still given there, and nothing supports it.");
  lines.push_back("Chosen after a search over many candidates: on new rows it will do less well than on its own.");
  lines.push_back("Association is not cause: changing an input need not change the response as the equation says.");
  lines.insert(lines.end(), notes.begin(), notes.end());
  return lines;
}

std::string commented(const std::vector<std::string>& lines, const std::string& mark) {
  std::string text;
  for (const std::string& raw : lines) {
    std::string line = mark + one_line_text(raw);
    // In C a backslash at the end of a line, also when written as a trigraph, continues the comment.
    if (line.ends_with('\\') || line.ends_with("\?\?/")) line += " .";
    text += line + "\n";
  }
  return text;
}

}  // namespace formsieve::report

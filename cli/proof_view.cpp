#include "proof_view.hpp"

#include "numbers.hpp"
#include "words.hpp"

#include <algorithm>
#include <limits>

namespace formsieve::cli {
namespace {

using judge::ProofReport;
using judge::ProvedChoice;
using judge::ProvedPredictor;
using judge::ProvedReach;
using judge::Shortlist;

constexpr std::size_t kMostPredictors = 20;
constexpr std::size_t kMostOtherForms = 5;
constexpr std::size_t kMostNumbersOfTerms = 12;
constexpr std::size_t kLeastOthers = 20;
constexpr std::size_t kUnlimited = std::numeric_limits<std::size_t>::max();

// "+9.3", "≥ +7.1" where only a bound is known.
std::string loss_words(const ProvedReach& reach) {
  if (reach.proved) return reach.loss ? "+" + with_decimals(*reach.loss, 1) : "none possible";
  if (reach.loss_at_least) return "≥ +" + with_decimals(*reach.loss_at_least, 1);
  return "open";
}

// What is known of the cost, for ordering.
double cost(const ProvedReach& reach) {
  if (reach.proved) return reach.loss.value_or(std::numeric_limits<double>::infinity());
  return reach.loss_at_least.value_or(0.0);
}

// Where the lowest of all stands; several choices may, when nothing was found for them the bound decides.
bool is_best(const ProvedReach& reach) { return reach.loss == 0.0; }

struct Line {
  const ProvedPredictor* predictor = nullptr;
  const ProvedChoice* best = nullptr;
  const ProvedChoice* left_out = nullptr;   // null when it is always in
  std::vector<const ProvedChoice*> others;  // rising cost
  double share_in = 1.0;
};

Line line_of(const ProvedPredictor& predictor) {
  Line line;
  line.predictor = &predictor;
  const auto cheaper = [](const ProvedChoice* a, const ProvedChoice* b) {
    if (is_best(a->reach) != is_best(b->reach)) return is_best(a->reach);
    return cost(a->reach) < cost(b->reach);
  };
  for (const ProvedChoice& choice : predictor.choices) {
    if (line.best == nullptr || cheaper(&choice, line.best)) line.best = &choice;
    if (!choice.form) line.left_out = &choice;
  }
  for (const ProvedChoice& choice : predictor.choices) {
    if (choice.form && &choice != line.best) line.others.push_back(&choice);
  }
  std::stable_sort(line.others.begin(), line.others.end(), cheaper);
  if (line.left_out != nullptr) line.share_in = 1.0 - line.left_out->near_share;
  return line;
}

double cost_of_leaving(const Line& line) {
  return line.left_out == nullptr ? std::numeric_limits<double>::infinity() : cost(line.left_out->reach);
}

std::string choice_words(const ProvedChoice& choice) {
  return held_together(form_of_x(choice.form) + " " + loss_words(choice.reach));
}

std::string others_words(const Line& line, std::size_t most) {
  std::vector<std::string> parts;
  const std::size_t shown = line.others.size() <= most || line.others.size() == most + 1 ? line.others.size() : most;
  for (std::size_t i = 0; i < shown; ++i) parts.push_back(choice_words(*line.others[i]));
  if (shown < line.others.size())
    parts.push_back(held_together(std::to_string(line.others.size() - shown) + " more to " +
                                  loss_words(line.others.back()->reach)));
  return joined(parts, ", ");
}

std::string left_out_words(const Line& line) {
  if (line.left_out == nullptr) return "always in";
  return line.left_out == line.best ? "best" : loss_words(line.left_out->reach);
}

void form_costs(Page& page, const ProofReport& proof, bool whole) {
  std::vector<Line> lines;
  for (const ProvedPredictor& predictor : proof.predictors)
    if (!predictor.choices.empty()) lines.push_back(line_of(predictor));
  if (lines.empty()) return;
  std::stable_sort(lines.begin(), lines.end(),
                   [](const Line& a, const Line& b) { return cost_of_leaving(a) > cost_of_leaving(b); });
  const std::size_t hidden =
      !whole && lines.size() > kMostPredictors + 1 ? lines.size() - kMostPredictors : std::size_t{0};
  lines.resize(lines.size() - hidden);
  const std::string name = criterion_words(proof.criterion);
  TextTable table({{"predictor"},
                   {"best as", false, 0, 1},
                   {"left out", true, 0, 1},
                   {"near", true, 0, 1},
                   {"other forms", false, kLeastOthers, 2}});
  for (const Line& line : lines)
    table.add_row({{line.predictor->column},
                   {form_of_x(line.best->form)},
                   {left_out_words(line)},
                   {with_decimals(line.share_in, 2)},
                   {others_words(line, whole ? kUnlimited : kMostOtherForms)}});
  page.heading("What each form costs in " + name);
  page.table(table);
  if (hidden > 0) page.prose("and " + counted(hidden, "predictor") + " more; formsieve show RUN --profile prints all.");
  page.prose("x is the predictor. The lowest " + name +
             " with the form, or without the predictor, under any response form, beside the lowest of all. Proved, "
             "except that ≥ marks what it costs at least. Near: the share of the candidates within " +
             with_decimals(proof.within, proof.within == static_cast<int>(proof.within) ? 0 : 1) +
             " units that have the predictor.");
}

void response_costs(Page& page, const Shortlist& shortlist) {
  const ProofReport& proof = shortlist.proof;
  if (proof.responses.size() < 2) return;
  std::vector<std::string> parts;
  for (std::size_t r = 0; r < proof.responses.size(); ++r) {
    const ProvedReach& reach = proof.responses[r];
    const std::string name = forms::term_name(shortlist.responses.at(r), shortlist.data.response);
    parts.push_back(held_together(name + " " + (is_best(reach) ? "best" : loss_words(reach))));
  }
  page.prose("Response forms: " + joined(parts, ", ") + ".");
}

// As far as the loss falls and a little beyond.
void best_by_terms(Page& page, const ProofReport& proof, bool whole) {
  if (proof.by_terms.empty()) return;
  std::size_t best = 0;
  for (std::size_t i = 0; i < proof.by_terms.size(); ++i)
    if (cost(proof.by_terms[i].reach) < cost(proof.by_terms[best].reach)) best = i;
  const std::size_t end = whole ? proof.by_terms.size() : std::min(proof.by_terms.size(), best + 3);
  const std::size_t first = !whole && end > kMostNumbersOfTerms ? end - kMostNumbersOfTerms : 0;
  TextTable table({{"terms", true}, {"Δ" + criterion_words(proof.criterion), true, 0, 1}});
  for (std::size_t i = first; i < end; ++i) {
    const bool lowest = is_best(proof.by_terms[i].reach);
    table.add_row({{std::to_string(proof.by_terms[i].n_terms)},
                   {lowest ? "best" : loss_words(proof.by_terms[i].reach), lowest ? Tone::strong : Tone::plain}});
  }
  page.heading("The best of each number of terms");
  page.table(table);
}

}  // namespace

void proof_tables(Page& page, const Shortlist& shortlist, bool whole) {
  const ProofReport& proof = shortlist.proof;
  if (proof.empty()) return;
  page.heading("What is certain, by " + criterion_words(proof.criterion));
  for (const std::string& sentence : proof.words) page.note(sentence + ".");
  response_costs(page, shortlist);
  form_costs(page, proof, whole);
  best_by_terms(page, proof, whole);
}

}  // namespace formsieve::cli

#include "pipeline/proof_report.hpp"

#include "judge/words.hpp"
#include "pipeline/rounding.hpp"
#include "search/space.hpp"

#include <algorithm>
#include <cmath>
#include <cstdio>

namespace formsieve::pipeline {

namespace {

/// As fine as a share of some thousand candidates is.
constexpr double kNearShareStep = 1e-4;

std::string criterion_words(judge::Criterion criterion) {
  switch (criterion) {
    case judge::Criterion::aicc:
      return "AICc";
    case judge::Criterion::bic:
      return "BIC";
    default:
      return "AIC";
  }
}

std::string decimal(double value, int decimals) {
  char text[64];
  std::snprintf(text, sizeof text, "%.*f", decimals, value);
  return text;
}

/// "4", "2.5"
std::string short_number(double value) {
  char text[32];
  std::snprintf(text, sizeof text, "%g", value);
  return text;
}

std::string listed(const std::vector<std::string>& words) {
  std::string text;
  for (std::size_t i = 0; i < words.size(); ++i)
    text += (i == 0 ? "" : i + 1 == words.size() ? " and " : ", ") + words[i];
  return text;
}

class Reporter {
 public:
  Reporter(const Proved& proved, const Prepared& prepared, double within)
      : proved_(proved), prepared_(prepared), within_(within) {
    lowest_ = lead() == nullptr ? std::numeric_limits<double>::infinity() : lead()->score;
  }

  judge::ProofReport report() const;

 private:
  const proof::Listed* lead() const;
  judge::ProvedReach reach(const Forced& forced) const;
  judge::ProvedPredictor predictor(std::size_t j) const;
  std::size_t n_near() const { return near_end_; }
  std::vector<std::string> words(const judge::ProofReport& report) const;
  std::string lead_words(const judge::ProofReport& report) const;
  std::string near_words(const judge::ProofReport& report) const;
  std::string shared_words(const judge::ProofReport& report) const;

  const Proved& proved_;
  const Prepared& prepared_;
  double within_;
  double lowest_;
  std::size_t near_end_ = proved_.near.best.size();
};

/// The best of all that was found.
const proof::Listed* Reporter::lead() const {
  const proof::Listed* best = nullptr;
  for (const proof::Proof* list : {&proved_.best, &proved_.near})
    if (!list->best.empty() && (best == nullptr || list->best.front().score < best->score)) best = &list->best.front();
  return best;
}

judge::ProvedReach Reporter::reach(const Forced& forced) const {
  judge::ProvedReach reach;
  reach.proved = forced.proved;
  if (forced.best) {
    reach.criterion = finite(to_digits(to_step(forced.best->score, kCriterionStep)));
    reach.loss = finite(to_step(forced.best->score - lowest_, kCriterionStep));
    reach.response = forced.best->choice.response;
  }
  const double least = forced.proved && forced.best ? forced.best->score : forced.lower_bound;
  // what is known at least is rounded down, so that it stays true
  if (std::isfinite(least) && !forced.proved)
    reach.loss_at_least =
        std::max(0.0, to_step(std::floor((least - lowest_) / kCriterionStep) * kCriterionStep, kCriterionStep));
  else if (forced.proved)
    reach.loss_at_least = reach.loss;
  return reach;
}

judge::ProvedPredictor Reporter::predictor(std::size_t j) const {
  const design::Predictor& own = prepared_.data.predictors[j];
  judge::ProvedPredictor result{own.column, own.always, {}};
  const auto share = [&](std::size_t choice) {
    if (n_near() == 0) return 0.0;
    const auto count = std::count_if(proved_.near.best.begin(), proved_.near.best.end(),
                                     [&](const proof::Listed& one) { return one.choice.choice[j] == choice; });
    return to_step(static_cast<double>(count) / static_cast<double>(n_near()), kNearShareStep);
  };
  const auto& choices = proved_.of_choice[j];
  for (std::size_t f = 0; f < own.menu.size(); ++f)
    result.choices.push_back({own.menu[f], reach(choices[1 + f]), share(1 + f)});
  if (!own.always) result.choices.push_back({std::nullopt, reach(choices[0]), share(0)});
  return result;
}

std::string Reporter::lead_words(const judge::ProofReport& report) const {
  const std::string name = criterion_words(report.criterion);
  const std::string value = decimal(lowest_, 1);
  if (report.proved)
    return "Proved: none of the candidates has a lower " + name + " than " + value +
           " (rounding allowed for; a difference below " + short_number(report.tolerance) + " is none)";
  if (!std::isfinite(report.gap))
    return "Not proved: the lowest " + name + " found is " + value +
           "; nothing is known yet of the candidates that were not seen. A larger search.budget (--budget) helps";
  return "Not proved: the lowest " + name + " found is " + value + "; a candidate that was not seen may lie up to " +
         decimal(report.gap, report.gap < 10.0 ? 2 : 0) + " below it. A larger search.budget (--budget) narrows that";
}

std::string Reporter::near_words(const judge::ProofReport& report) const {
  const std::string name = criterion_words(report.criterion);
  const std::string distance = short_number(report.within) + " " + name + " units of the lowest";
  const std::string count = judge::grouped_digits(std::to_string(report.n_near));
  if (report.near_complete)
    return report.n_near == 1 ? "Within " + distance + " there is no other candidate"
                              : "Within " + distance + " lie exactly " + count + " candidates";
  return "Within " + distance + " lie at least " + count + " candidates; the shares below are those of the " + count +
         " that are known" + (proved_.near.full ? ", the lowest of them" : "");
}

/// What all of the near-best set do alike: the choices with a share of 1.
std::string Reporter::shared_words(const judge::ProofReport& report) const {
  std::vector<std::string> used, unused;
  for (const auto& predictor : report.predictors)
    for (const auto& choice : predictor.choices) {
      if (choice.near_share < 1.0) continue;
      if (choice.form)
        used.push_back(forms::term_name(*choice.form, predictor.column));
      else
        unused.push_back(predictor.column);
    }
  if (report.n_near < 2 || (used.empty() && unused.empty())) return "";
  std::string text = report.near_complete ? "Every specification within " : "Every known specification within ";
  text += short_number(report.within) + " " + criterion_words(report.criterion) + " units";
  if (!used.empty()) text += " uses " + listed(used);
  if (!unused.empty()) text += (used.empty() ? " leaves out " : ", and leaves out ") + listed(unused);
  return text;
}

std::vector<std::string> Reporter::words(const judge::ProofReport& report) const {
  std::vector<std::string> words;
  if (std::isfinite(lowest_)) {
    words.push_back(lead_words(report));
    words.push_back(near_words(report));
    if (std::string shared = shared_words(report); !shared.empty()) words.push_back(std::move(shared));
  }
  std::vector<std::string> without;
  for (const std::size_t r : proved_.without_density)
    without.push_back(forms::term_name(prepared_.data.response_forms[r], prepared_.summary.response));
  if (!without.empty())
    words.push_back("The proof leaves out " + listed(without) +
                    ": its slope is zero or infinite on some row, so that " + criterion_words(report.criterion) +
                    " does not exist");
  return words;
}

judge::ProofReport Reporter::report() const {
  judge::ProofReport report;
  report.criterion = proved_.criterion;
  report.tolerance = proof::kTolerance;
  report.nodes = proved_.nodes;
  report.within = within_;
  report.n_near = n_near();
  report.near_complete = proved_.near.proved && !proved_.near.full;
  const double bound = std::max(proved_.best.lower_bound, proved_.near.lower_bound);
  report.proved = proved_.best.proved || proved_.near.proved || bound >= lowest_;
  report.gap = report.proved ? 0.0 : to_step(std::max(0.0, lowest_ - bound), kCriterionStep);
  for (const Forced& forced : proved_.by_response) report.responses.push_back(reach(forced));
  for (std::size_t j = 0; j < proved_.of_choice.size(); ++j) report.predictors.push_back(predictor(j));
  for (std::size_t k = 0; k < proved_.by_terms.size(); ++k)
    if (proved_.by_terms[k].best) report.by_terms.push_back({k, reach(proved_.by_terms[k])});
  report.words = words(report);
  return report;
}

}  // namespace

judge::ProofReport proof_report(const Proved& proved, const Prepared& prepared, double within) {
  return Reporter(proved, prepared, within).report();
}

}  // namespace formsieve::pipeline

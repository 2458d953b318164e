#include "search/space.hpp"

#include <algorithm>
#include <cassert>

namespace formsieve::search {

namespace {

/// Choices of one predictor, absence included where it is one.
std::size_t radix(const PredictorChoices& predictor) { return predictor.forms.size() + (predictor.always ? 0 : 1); }

}  // namespace

std::size_t n_terms(std::span<const std::uint16_t> choice) {
  return static_cast<std::size_t>(std::count_if(choice.begin(), choice.end(), [](std::uint16_t c) { return c != 0; }));
}

bool admits(const Space& space, std::span<const std::uint16_t> choice) {
  if (choice.size() != space.predictors.size()) return false;
  for (std::size_t j = 0; j < choice.size(); ++j)
    if (choice[j] > space.predictors[j].forms.size() || (choice[j] == 0 && space.predictors[j].always)) return false;
  return n_terms(choice) <= space.max_terms.value_or(choice.size());
}

std::vector<std::uint16_t> least_choice(const Space& space) {
  std::vector<std::uint16_t> choice;
  for (const PredictorChoices& predictor : space.predictors)
    choice.push_back(predictor.always ? std::uint16_t{1} : std::uint16_t{0});
  return choice;
}

std::vector<BigCount> count_by_terms(const Space& space) {
  const std::size_t n_predictors = space.predictors.size();
  const std::size_t most = std::min(space.max_terms.value_or(n_predictors), n_predictors);
  std::vector<BigCount> by_terms(n_predictors + 1, 0);
  by_terms[0] = space.n_responses;
  std::size_t placed = 0;
  for (const PredictorChoices& predictor : space.predictors) {
    placed = std::min(placed + 1, most);
    for (std::size_t k = placed + 1; k-- > 0;) {
      if (predictor.always) by_terms[k] = 0;
      // by_terms[k − 1] still holds the value without this predictor, since k falls
      if (k > 0) by_terms[k] += by_terms[k - 1] * predictor.forms.size();
    }
  }
  return by_terms;
}

BigCount count(const Space& space) {
  BigCount total = 0;
  for (const BigCount& part : count_by_terms(space)) total += part;
  return total;
}

BigCount number_of(const Space& space, const Choice& choice) {
  assert(choice.response < space.n_responses && choice.choice.size() == space.predictors.size());
  BigCount number = choice.response;
  for (std::size_t j = 0; j < space.predictors.size(); ++j) {
    const PredictorChoices& predictor = space.predictors[j];
    assert(choice.choice[j] <= predictor.forms.size() && !(predictor.always && choice.choice[j] == 0));
    number *= radix(predictor);
    number += predictor.always ? choice.choice[j] - 1u : choice.choice[j];
  }
  return number;
}

std::optional<Choice> choice_of(const Space& space, const BigCount& number) {
  if (number < 0) return std::nullopt;
  Choice choice;
  choice.choice.resize(space.predictors.size());
  BigCount rest = number;
  for (std::size_t j = space.predictors.size(); j-- > 0;) {
    const PredictorChoices& predictor = space.predictors[j];
    if (radix(predictor) == 0) return std::nullopt;
    BigCount digit;
    boost::multiprecision::divide_qr(BigCount(rest), BigCount(radix(predictor)), rest, digit);
    choice.choice[j] = static_cast<std::uint16_t>(digit.convert_to<unsigned>() + (predictor.always ? 1u : 0u));
  }
  if (rest >= space.n_responses) return std::nullopt;
  choice.response = rest.convert_to<std::size_t>();
  if (space.max_terms && n_terms(choice.choice) > *space.max_terms) return std::nullopt;
  return choice;
}

}  // namespace formsieve::search

// Scores of candidates and bounds of the relaxation, evaluated anew in long double from the Gram matrix: what the
// checker of certificates goes by.
#pragma once

#include "proof/certificate.hpp"
#include "proof/problem.hpp"

#include <Eigen/Core>

#include <cstddef>
#include <cstdint>
#include <string>
#include <vector>

namespace formsieve::test {

using Real = long double;
using RealMatrix = Eigen::Matrix<Real, Eigen::Dynamic, Eigen::Dynamic>;

/// Bit `choice` of a predictor's actions.
inline bool has(proof::Actions actions, std::size_t choice) { return (actions >> choice & 1) != 0; }

/// The problem with its Gram matrix in long double, columns and responses of unit length.
class PlainProblem {
 public:
  explicit PlainProblem(const proof::Problem& problem);

  const proof::Problem& given() const { return problem_; }
  const search::PredictorChoices& predictor(std::size_t j) const { return problem_.space->predictors[j]; }
  /// Design columns of a choice: 0 for absence.
  std::size_t width(std::size_t j, std::size_t choice) const;
  std::size_t first_column(std::size_t j, std::size_t choice) const;
  Eigen::Index response_column(std::size_t response) const;
  /// The score of an RSS relative to the response's own sum of squares; +infinity where the penalty ends.
  Real score(std::size_t response, Real rss, std::size_t n_columns) const;
  /// The score of a candidate by elimination in plan order; +infinity at a pivot of 1e-8 or less.
  Real score_of(std::size_t response, const std::vector<std::uint16_t>& choice) const;
  /// The whole matrix after the columns of the predictors with one action left were eliminated.
  RealMatrix projected(const proof::Certificate::Part& part) const;

 private:
  const proof::Problem& problem_;
  RealMatrix gram_;
};

/// One choice of an open predictor and what the relaxation lets it gain.
struct GainOfChoice {
  std::size_t choice = 0;
  std::size_t terms = 0, columns = 0;
  Real gain = 0.0;
};

/// A bound evaluated: sums of gains are still to be maximised.
struct PlainBound {
  std::string fault;  ///< what is wrong with D, v or the problem they are for; the rest is nothing then
  Real base = 0.0;
  std::vector<std::vector<GainOfChoice>> choices;  ///< [predictor], the decided ones with their one choice
};

PlainBound evaluate(const PlainProblem& problem, const proof::Certificate::Step& step);

/// Terms that candidates may have.
struct TermRange {
  std::size_t fewest = 0, most = 0;
};

/// Whether every candidate of a part of the problem that was evaluated has a bound above the threshold.
bool above(const PlainProblem& problem, const PlainBound& bound, const proof::Certificate::Part& part,
           const TermRange& terms, Real threshold);

}  // namespace formsieve::test

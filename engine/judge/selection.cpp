#include "judge/selection.hpp"

#include "base/sums.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numeric>
#include <utility>

namespace formsieve::judge {

namespace {

/// The walk down the ranking: a few candidates at a time, each placed in its turn.
class Descent {
 public:
  Descent(std::span<const Candidate> ranked, std::size_t n, const Witness& witness)
      : ranked_(ranked), n_(n), witness_(witness) {}

  Selection run() {
    while (selection_.lines.size() < n_ && selection_.n_looked_at < ranked_.size())
      take(selection_.n_looked_at, std::min(selection_.n_looked_at + kAskedAtOnce, ranked_.size()));
    add_named();
    std::sort(selection_.lines.begin(), selection_.lines.end(),
              [](const Line& a, const Line& b) { return a.index < b.index; });
    return std::move(selection_);
  }

 private:
  std::vector<std::vector<double>> predictions_of(const std::vector<std::size_t>& indices) const {
    return witness_.predictions ? witness_.predictions(indices) : std::vector<std::vector<double>>(indices.size());
  }

  std::optional<std::size_t> home(const std::vector<double>& predictions) const {
    return witness_.predictions ? families_.home(predictions) : std::nullopt;
  }

  bool passes(std::size_t index) const { return !witness_.passes || witness_.passes(index); }

  void found(std::size_t index, std::vector<double> predictions) {
    selection_.lines.push_back({index, {}, false});
    families_.found(std::move(predictions), ranked_[index].cv.rmse);
  }

  void place(std::size_t index, std::vector<double> predictions) {
    if (const auto family = home(predictions))
      selection_.lines[*family].siblings.push_back(index);
    else if (passes(index))
      found(index, std::move(predictions));
  }

  /// Candidates from `first` to before `end`, until the list is full. Gates are asked of those that no line found
  /// before claims.
  void take(std::size_t first, std::size_t end) {
    std::vector<std::size_t> indices(end - first);
    std::iota(indices.begin(), indices.end(), first);
    auto predictions = predictions_of(indices);
    if (witness_.examine_gates) {
      std::vector<std::size_t> unclaimed;
      for (const std::size_t i : indices)
        if (!home(predictions[i - first])) unclaimed.push_back(i);
      witness_.examine_gates(unclaimed);
    }
    for (std::size_t i = first; i < end && selection_.lines.size() < n_; ++i) {
      place(i, std::move(predictions[i - first]));
      selection_.n_looked_at = i + 1;
    }
  }

  /// Named lines that are no line yet: siblings of one, or further down than the walk went.
  void add_named() {
    std::vector<std::size_t> named;
    for (std::size_t i = 0; i < ranked_.size(); ++i)
      if (!ranked_[i].marks.empty() && !is_line(i)) named.push_back(i);
    const auto predictions = predictions_of(named);
    for (std::size_t k = 0; k < named.size(); ++k) {
      const auto family = home(predictions[k]);
      if (family && named[k] >= selection_.n_looked_at) selection_.lines[*family].siblings.push_back(named[k]);
      added_.push_back({named[k], {}, family.has_value()});
    }
    selection_.lines.insert(selection_.lines.end(), added_.begin(), added_.end());
  }

  bool is_line(std::size_t index) const {
    return std::any_of(selection_.lines.begin(), selection_.lines.end(),
                       [index](const Line& line) { return line.index == index; });
  }

  std::span<const Candidate> ranked_;
  std::size_t n_;
  const Witness& witness_;
  Families families_;
  Selection selection_;
  std::vector<Line> added_;
};

double error_of(const Candidate& candidate) { return criterion_value(candidate, Criterion::cv_rmse); }

/// a is as good as b by all three, and better by one.
bool dominates(const Candidate& a, const Candidate& b) {
  const bool as_good = error_of(a) <= error_of(b) && a.terms.size() <= b.terms.size() && n_failed(a) <= n_failed(b);
  return as_good && (error_of(a) < error_of(b) || a.terms.size() < b.terms.size() || n_failed(a) < n_failed(b));
}

}  // namespace

double root_mean_squared_difference(std::span<const double> a, std::span<const double> b) {
  std::vector<double> difference(a.size());
  for (std::size_t i = 0; i < a.size(); ++i) difference[i] = a[i] - b[i];
  const double square = base::sum_of_squares(difference, 0.0) / static_cast<double>(a.size());
  return std::isfinite(square) ? std::sqrt(square) : std::numeric_limits<double>::quiet_NaN();
}

void Families::found(std::vector<double> predictions, std::optional<double> cv_rmse) {
  leaders_.push_back({std::move(predictions), kAlikeShare * cv_rmse.value_or(0.0)});
}

std::optional<std::size_t> Families::home(std::span<const double> predictions) const {
  for (std::size_t f = 0; f < leaders_.size(); ++f)
    if (root_mean_squared_difference(predictions, leaders_[f].predictions) < leaders_[f].limit) return f;
  return std::nullopt;
}

Selection select(std::span<const Candidate> ranked, std::size_t n, const Witness& witness) {
  return Descent(ranked, n, witness).run();
}

std::size_t n_failed(const Candidate& candidate) {
  return static_cast<std::size_t>(std::count_if(candidate.checks.begin(), candidate.checks.end(),
                                                [](const checks::Check& check) { return !check.passes; }));
}

void mark_pareto(std::span<Candidate> listed) {
  for (Candidate& candidate : listed)
    candidate.pareto =
        std::none_of(listed.begin(), listed.end(), [&](const Candidate& other) { return dominates(other, candidate); });
}

}  // namespace formsieve::judge

// Room model: fitted candidates as they are kept, and the arithmetic of scoring new rows by one. Knows nothing of files
// and text. May call: base, forms, backtransform.
#pragma once

#include "model/cross_quantile.hpp"
#include "model/mean.hpp"

#include <formsieve/model.hpp>

#include <array>
#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

namespace formsieve::model {

/// Rows that are scored together: a few columns of them fit into the first cache.
inline constexpr std::size_t kBatchRows = 128;

/// A row of the rows in use must not be flagged for the rounding of its own leverage.
inline constexpr double kLeverageRounding = 1e-9;

/// The code of a level that the model does not know; a missing one is NaN, as in columns of numbers.
inline constexpr double kUnknownLevel = -1.0;

/// What is said of a batch of rows, own units. Unset values are NaN; ends of intervals may be infinite.
struct Scores {
  using Values = std::array<double, kBatchRows>;
  Values mean, median, low_normal, high_normal, low_cross, high_cross;
  Values leverage;
  std::array<std::uint8_t, kBatchRows> flags;
};

/// Scores rows by one model. Immutable, shared by all workers.
///
/// With x the design row of p columns, intercept first: η = βᵀx, h = ‖R x‖², median g⁻¹(η), mean by the model's rule;
/// the normal-theory interval is g⁻¹(η ± t·σ·√(1/w + h)), the CV+ interval that of backtransform::CrossInterval.
class Scorer {
 public:
  /// Memory of one worker.
  class Workspace {
   public:
    explicit Workspace(const Scorer& scorer) : columns(scorer.p() * kBatchRows), folds(scorer.k() * kBatchRows) {}

   private:
    friend class Scorer;
    double* packed(std::size_t width) {
      wide.resize(width * kBatchRows);
      return wide.data();
    }
    std::vector<double> wide;     ///< columns of one form of several, without gaps
    std::vector<double> columns;  ///< [p][kBatchRows] of the design
    std::vector<double> folds;    ///< [K][kBatchRows] predictions without each fold
    std::array<double, kBatchRows> eta, low, high, sum;
    MeanWorkspace mean;
  };

  /// `model` has passed check(). `level` in (0, 1). Cost O(size of the model).
  explicit Scorer(Model model, double level = 0.95);

  /// `values` [terms], each [n] raw values (level codes, kUnknownLevel), NaN for missing; `weights` [n] positive, or
  /// size 0 for w = 1; n ≤ kBatchRows. Cost O(n·p·(p/2 + K)) and the steps of CV+.
  void score(std::span<const std::span<const double>> values, std::span<const double> weights, std::size_t n,
             Workspace& workspace, Scores& scores) const;

  /// Which of the term-wise flags (missing, unknown, undefined, outside) hold for one value of a term.
  std::uint8_t flags_of(std::size_t term, double value) const;

  const Model& model() const { return model_; }
  std::size_t p() const { return model_.coefficients.size(); }
  std::size_t k() const { return model_.folds.size(); }
  /// Whether intervals exist at all: degrees of freedom for one, enough rows for the other.
  bool has_normal() const;
  bool has_cross() const { return cross_.exists(); }

 private:
  void evaluate_terms(std::span<const std::span<const double>> values, std::size_t n, Workspace& work,
                      Scores& scores) const;
  void set_leverage(std::size_t n, Workspace& work, Scores& scores) const;
  void set_median(std::size_t n, Workspace& work, Scores& scores) const;
  void set_normal(std::span<const double> weights, std::size_t n, Workspace& work, Scores& scores) const;
  void set_cross(std::span<const double> weights, std::size_t n, Workspace& work, Scores& scores) const;
  void carry(std::size_t n, Workspace& work, Scores& scores, Scores::Values& low, Scores::Values& high) const;
  void blank_undefined(std::size_t n, Scores& scores) const;

  Model model_;
  double quantile_ = 0.0;  ///< of Student's t
  Mean mean_;
  CrossQuantile cross_;
  std::vector<std::vector<double>> root_rows_;  ///< row i of R from its diagonal on
  forms::Interval inverse_domain_{}, own_domain_{};
  bool rises_ = true;
};

/// Whether a model read from a file hangs together, so that it may be given to a Scorer: numbers of coefficients,
/// finite values, rising lists, an invertible response. Errors (kind data) without a place.
Status check(const Model& model);

/// By rank, or by the name of a line: "7", "recommended". Errors (kind usage) with what there is.
Result<const Model*> find_model(const ModelSet& set, const std::string& rank_or_mark);

}  // namespace formsieve::model

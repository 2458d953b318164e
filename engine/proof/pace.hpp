// When a bound that is improved pass by pass has been improved enough.
#pragma once

#include <algorithm>
#include <cmath>
#include <cstddef>
#include <limits>

namespace formsieve::proof {

/// Passes of coordinate descent for v at most, at a root and at a node.
inline constexpr std::size_t kRootDescent = 200;
inline constexpr std::size_t kNodeDescent = 60;

/// Passes in a row that gained little.
class Idleness {
 public:
  /// As many end the work at one setting.
  static constexpr std::size_t kMost = 2;

  /// A pass counts as idle that closes less than `small_gain` of the gap to the threshold that remains, a gap below
  /// `smallest_gap` of a score counting as that.
  Idleness(double small_gain, double smallest_gap) : small_gain_(small_gain), smallest_gap_(smallest_gap) {}

  void note(double lower, double threshold) {
    const double gap = std::max(threshold - reference_, smallest_gap_);
    const bool gained = !std::isfinite(reference_) || (std::isfinite(gap) && lower > reference_ + small_gain_ * gap);
    n_ = gained ? 0 : n_ + 1;
    if (gained) reference_ = lower;
  }
  bool enough() const { return n_ >= kMost; }
  void start_anew() { n_ = 0; }
  /// The bounds so far are no measure any more.
  void forget() {
    reference_ = -std::numeric_limits<double>::infinity();
    n_ = 0;
  }

 private:
  double small_gain_, smallest_gap_;
  double reference_ = -std::numeric_limits<double>::infinity();
  std::size_t n_ = 0;
};

/// Of block-coordinate sweeps: the barrier falls where they are idle, at a root, and ends them.
class SweepPace {
 public:
  SweepPace(bool root, bool inherits, double smallest_gap)
      : root_(root),
        barrier_(root && !inherits ? kFirstBarrier : kLastBarrier),
        idleness_(root ? kSmallGain_root : kSmallGain_node, smallest_gap) {}

  bool root() const { return root_; }
  std::size_t descent() const { return root_ ? kRootDescent : kNodeDescent; }
  /// The barrier's weight μ in units of λ over the number of columns.
  double barrier() const { return barrier_; }
  void note(double lower, double threshold) { idleness_.note(lower, threshold); }
  void forget() { idleness_.forget(); }
  bool finished() {
    if (root_ && idleness_.enough() && barrier_ > kLastBarrier * 1.01) {
      barrier_ = std::max(kLastBarrier, barrier_ * kBarrierStep);
      idleness_.start_anew();
    }
    return idleness_.enough();
  }

 private:
  static constexpr double kFirstBarrier = 1.0;  ///< large first at a root, then small
  static constexpr double kLastBarrier = 0.1;
  static constexpr double kBarrierStep = 0.3;
  static constexpr double kSmallGain_root = 0.01;
  static constexpr double kSmallGain_node = 0.03;

  bool root_;
  double barrier_;
  Idleness idleness_;
};

}  // namespace formsieve::proof

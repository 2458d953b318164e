// The columns of the forms that span several, as functions of u with a value alone.
#pragma once

#include "forms/functions.hpp"

#include <cmath>
#include <cstddef>
#include <span>

namespace formsieve::forms {

/// A function restricted to u > 0, as every column of a fractional polynomial is.
template <class Function>
struct OnPositive {
  Function function;
  double value(double u) const { return u > 0.0 ? function.value(u) : kNaN; }
};

/// f(u)·ln u on u > 0: the second column of a fractional polynomial with a repeated power.
template <class Function>
struct TimesLog {
  Function function;
  double value(double u) const { return u > 0.0 ? function.value(u) * std::log(u) : kNaN; }
};

/// Cubic column of a restricted spline for knot t_j, j up to the last but two (Stone & Koo 1985); t_b and t_k are the
/// last two knots:
///   ((u − t_j)₊³ − (u − t_b)₊³ (t_k − t_j)/(t_k − t_b) + (u − t_k)₊³ (t_b − t_j)/(t_k − t_b)) / (t_k − t_1)²
struct SplineColumn {
  double knot, before_last, last, squared_range;
  double ratio;  ///< (t_k − t_j)/(t_k − t_b); the factor of the last term is ratio − 1

  SplineColumn(std::span<const double> knots, std::size_t j)
      : knot{knots[j]},
        before_last{knots[knots.size() - 2]},
        last{knots.back()},
        squared_range{(knots.back() - knots.front()) * (knots.back() - knots.front())},
        ratio{(last - knot) / (last - before_last)} {}

  double value(double u) const {
    if (u <= knot) return 0.0;
    if (u >= last) return beyond(u - last) / squared_range;
    double sum = cubed(u - knot);
    if (u > before_last) sum -= ratio * cubed(u - before_last);
    return sum / squared_range;
  }

 private:
  static double cubed(double d) { return d * d * d; }
  /// Right of the last knot the cubes cancel to a line, written out so that no digit is lost far away.
  double beyond(double distance) const {
    const double d = last - knot;
    const double h = last - before_last;
    return d * (d - h) * (d + h + 3.0 * distance);
  }
};

/// 1 for the rows of one level, 0 for those of another known level; NaN where the code is none.
struct LevelIndicator {
  double code;
  double n_levels;
  double value(double x) const {
    const bool known = x >= 0.0 && x < n_levels && x == std::floor(x);
    return known ? (x == code ? 1.0 : 0.0) : kNaN;
  }
};

}  // namespace formsieve::forms

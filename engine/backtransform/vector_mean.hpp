// Private to room backtransform: means of an inverse over many residuals, whole vectors at a time.
#pragma once

#include <formsieve/forms.hpp>

#include <Eigen/Core>

#include <optional>

namespace formsieve::backtransform {

/// The mean of h(eta + e·root) over `residuals` e, for the forms whose inverse is made of arithmetic, square roots,
/// exponentials and logarithms; unset where it is not, or where the plain loop keeps more digits.
///   plain     the form without reflection and shift; h is its inverse, moved to closed edges, NaN beyond open ones
///   kind      the plain form that it equals
///   smallest  the smallest argument
std::optional<double> vector_mean(const forms::Form& plain, forms::Kind kind,
                                  const Eigen::Map<const Eigen::ArrayXd>& residuals, double eta, double root,
                                  double smallest);

}  // namespace formsieve::backtransform

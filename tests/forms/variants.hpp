// The forms and the points over which the property suite runs.
#pragma once

#include <formsieve/forms.hpp>

#include <string>
#include <vector>

namespace formsieve::forms::tests {

/// Every kind of one column × several parameters × plain, shifted and reflected arguments.
std::vector<Form> functions();
/// Every numeric kind of several columns, and levels, with the same arguments.
std::vector<Form> blocks();
/// Raw values of all sizes and both signs, 1e-300 to 1e300, the neighbourhood of 0, 1 and of every anchor used above.
std::vector<double> points();
/// points(), and those where u of this form takes the sizes at which forms bend.
std::vector<double> points_of(const Form& form);
/// Of points_of(form), those inside an interval.
std::vector<double> points_in(const Form& form, const Interval& interval);

double argument(const Form& form, double x);  ///< u
std::string name(const Form& form);           ///< for messages

}  // namespace formsieve::forms::tests

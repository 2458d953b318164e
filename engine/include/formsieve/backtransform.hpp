// Room backtransform, result types: what going back to own units costs. May call: base.
#pragma once

#include <optional>
#include <string>
#include <vector>

namespace formsieve::backtransform {

/// One way back to own units, and what it leaves on held-out rows.
struct Correction {
  std::string method;             ///< "none", "smearing", …
  double factor = 1.0;            ///< mean corrected over mean uncorrected prediction on the rows in use
  std::optional<double> cv_bias;  ///< mean of predicted minus measured over held-out rows, own units
  std::optional<double> cv_rmse;  ///< own units
};

struct Summary {
  double smearing_factor =
      1.0;  ///< ln: mean of exp(residual); otherwise the ratio of mean predictions, smeared over naive
  std::string used = "smearing";
  std::string formula;  ///< the mean in own units written out, "energy_kwh = 1.031 · exp(3.21 + 0.84·ln(floor_area))"
  std::vector<Correction> corrections;
};

}  // namespace formsieve::backtransform

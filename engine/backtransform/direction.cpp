#include "backtransform/effects.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

namespace formsieve::backtransform {

namespace {

/// Points of the scan: a spline of 5 knots, the most winding form, has pieces of a tenth of the range and more.
constexpr int kScanPoints = 401;
/// Moves below this share of the whole range of the term's part are rounding, or nothing that a reader would see.
constexpr double kNoMoveRel = 1e-6;
/// More turns than this are counted, not listed.
constexpr std::size_t kListedMoves = 3;

/// The term's part at each point of the scan, times the sign.
std::vector<double> scanned(const forms::Form& form, const Eigen::Ref<const Eigen::VectorXd>& coefficients, double low,
                            double high, int sign) {
  std::vector<double> part, columns(forms::n_columns(form));
  for (int k = 0; k < kScanPoints; ++k) {
    const double share = static_cast<double>(k) / (kScanPoints - 1);
    forms::evaluate(form, k + 1 == kScanPoints ? high : low + share * (high - low), columns);
    double total = 0.0;
    for (std::size_t c = 0; c < columns.size(); ++c) total += coefficients[static_cast<Eigen::Index>(c)] * columns[c];
    if (std::isfinite(total)) part.push_back(sign * total);
  }
  return part;
}

/// +1 and −1 in turn, one for each stretch that moves by more than `least` before it turns.
std::vector<int> moves_of(const std::vector<double>& part, double least) {
  std::vector<int> moves;
  double lowest = part.front(), highest = part.front();  // since the last turn
  for (const double value : part) {
    lowest = std::min(lowest, value);
    highest = std::max(highest, value);
    const int now = moves.empty() ? 0 : moves.back();
    if (now <= 0 && value - lowest > least) {
      moves.push_back(1);
      highest = value;
    } else if (now >= 0 && highest - value > least) {
      moves.push_back(-1);
      lowest = value;
    }
  }
  return moves;
}

}  // namespace

std::string direction_words(const forms::Form& form, const Eigen::Ref<const Eigen::VectorXd>& coefficients, double low,
                            double high, int response_sign) {
  const std::vector<double> part = scanned(form, coefficients, low, high, response_sign);
  if (part.empty()) return {};
  const auto [least, most] = std::minmax_element(part.begin(), part.end());
  const std::vector<int> moves =
      moves_of(part, std::max(kNoMoveRel * (*most - *least), std::numeric_limits<double>::epsilon() * std::abs(*most)));
  if (moves.empty()) return "flat";
  if (moves.size() > kListedMoves) return "changing direction " + std::to_string(moves.size() - 1) + " times";
  std::string words;
  for (const int move : moves) words += (words.empty() ? "" : " then ") + std::string(move > 0 ? "rising" : "falling");
  return words;
}

}  // namespace formsieve::backtransform

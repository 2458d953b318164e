// The mean in own units as a reader would write it.
#include "backtransform/corrections.hpp"

#include <algorithm>
#include <cmath>
#include <cstdio>

namespace formsieve::backtransform {

namespace {

using forms::Kind;

/// A mean residual this small beside their root mean square is rounding: residuals of a fit with intercept sum to 0.
constexpr double kRounding = 1e-9;

/// Between these sizes digits are easier to read than a power of ten.
constexpr double kSmallestPlain = 1e-5, kLargestPlain = 1e15;

/// |value| with that many significant digits, without zeros at the end.
std::string figure(double value, int digits) {
  const double size = std::abs(value);
  char text[64];
  if (size != 0.0 && (size < kSmallestPlain || size >= kLargestPlain)) {
    std::snprintf(text, sizeof text, "%.*e", digits - 1, size);
    return text;
  }
  const int before_point = size == 0.0 ? 1 : static_cast<int>(std::floor(std::log10(size))) + 1;
  std::snprintf(text, sizeof text, "%.*f", std::max(0, digits - before_point), size);
  std::string plain = text;
  if (plain.find('.') != std::string::npos) {
    plain.erase(plain.find_last_not_of('0') + 1);
    if (plain.back() == '.') plain.pop_back();
  }
  return plain;
}

std::string signed_figure(double value, int digits) { return (value < 0.0 ? "−" : "") + figure(value, digits); }
/// " + 0.0213", " − 0.0213"
std::string added(double value, int digits) { return (value < 0.0 ? " − " : " + ") + figure(value, digits); }

/// A piece of the formula: the mean of u, whether it is a sum, and whether it speaks of η.
struct Piece {
  std::string text;
  bool is_sum = false;
  bool names_eta = false;
};

bool centred(const Smearing& smearing) {
  const auto& [first, second, third] = smearing.moments();
  return std::abs(first) <= kRounding * std::sqrt(second);
}

Piece square_piece(const Smearing& smearing, const std::string& right, int digits) {
  const auto& [first, second, third] = smearing.moments();
  if (centred(smearing)) return {"(" + right + ")²" + added(second, digits), true, false};
  return {"η²" + added(2.0 * first, digits) + "·η" + added(second, digits), true, true};
}

Piece cube_piece(const Smearing& smearing, int digits) {
  const auto& [first, second, third] = smearing.moments();
  const std::string middle = centred(smearing) ? "" : added(3.0 * first, digits) + "·η²";
  return {"η³" + middle + added(3.0 * second, digits) + "·η" + added(third, digits), true, true};
}

Piece identity_piece(const Smearing& smearing, const std::string& right, int digits) {
  // Without weights the residuals sum to 0; with them only their weighted sum does.
  if (!smearing.weighted()) return {right, true, false};
  return {right + added(smearing.moments().first, digits), true, false};
}

/// The closed forms; an empty text for every other.
Piece closed_piece(const Smearing& smearing, const std::string& right, int digits) {
  switch (smearing.kind()) {
    case Kind::identity:
      return identity_piece(smearing, right, digits);
    case Kind::ln:
      return {figure(smearing.mean_exp(), digits) + " · exp(" + right + ")"};
    case Kind::log10:
      return {figure(smearing.mean_exp(), digits) + " · 10^(" + right + ")"};
    case Kind::sqrt:
      return square_piece(smearing, right, digits);
    case Kind::cube_root:
      return cube_piece(smearing, digits);
    case Kind::asinh:
      return {figure(smearing.mean_cosh(), digits) + "·sinh(η)" + added(smearing.mean_sinh(), digits) + "·cosh(η)",
              true, true};
    default:
      return {};
  }
}

/// Own units from u: "101 − …", "… − 20".
std::string in_own_units(const forms::Form& response, const Piece& piece) {
  constexpr int kAllDigits = 15;  // an anchor or shift is exact
  if (response.reflect) {
    const std::string inner = piece.is_sum ? "(" + piece.text + ")" : piece.text;
    const double anchor = *response.reflect + response.shift;
    return (anchor == 0.0 ? "−" : signed_figure(anchor, kAllDigits) + " − ") + inner;
  }
  return response.shift == 0.0 ? piece.text : piece.text + added(-response.shift, kAllDigits);
}

std::string averaged_text(const Smearing& smearing, const std::string& which = "") {
  std::string of = smearing.n_residuals() > kMostResiduals ? "mean over 1,001 quantiles e of the " : "mean over the ";
  if (smearing.weighted()) of += "standardised ";
  of += "training residuals";
  if (smearing.n_residuals() <= kMostResiduals) of += " e";
  of += which;
  return of + " of " + forms::inverse_label(smearing.response(), smearing.weighted() ? "η + e/√w" : "η + e");
}

/// "below 0 count as 0", "not above 0 leave the mean undefined": what happens at one edge of the inverse's domain.
std::string edge_text(double edge, bool closed, bool lower, int digits) {
  if (!std::isfinite(edge)) return {};
  const std::string at = signed_figure(edge, digits);
  if (closed) return std::string(lower ? "below " : "above ") + at + " count as " + at;
  return std::string(lower ? "not above " : "not below ") + at + " leave the mean undefined";
}

}  // namespace

std::string formula(const Smearing& smearing, const std::string& response_column, const std::string& right_hand_side,
                    int digits) {
  const Piece piece = closed_piece(smearing, right_hand_side, digits);
  const bool closed = !piece.text.empty();
  std::string text = response_column + " = ";
  text += closed ? in_own_units(smearing.response(), piece) : averaged_text(smearing);
  if (!closed || piece.names_eta) text += ", where η = " + right_hand_side;
  if (closed && smearing.weighted()) text += ", for a row of weight 1";
  return text;
}

std::string formula(const ThirdsSmearing& thirds, const std::string& response_column,
                    const std::string& right_hand_side, int digits) {
  const auto by_third = [&](const std::string& first, const std::string& second, const std::string& third) {
    return first + " up to a form-scale prediction of " + signed_figure(thirds.cuts()[0], digits) + ", " + second +
           " up to " + signed_figure(thirds.cuts()[1], digits) + " and " + third + " above";
  };
  const Smearing& first = thirds.of_third(0);
  const std::string start = response_column + " = ", where = ", where η = " + right_hand_side;
  const std::string weight = first.weighted() ? ", for a row of weight 1" : "";
  if (first.kind() == Kind::ln || first.kind() == Kind::log10) {
    const Piece piece{(first.kind() == Kind::ln ? "f · exp(" : "f · 10^(") + right_hand_side + ")"};
    const auto factor = [&](std::size_t k) { return figure(thirds.of_third(k).mean_exp(), digits); };
    return start + in_own_units(first.response(), piece) + ", where f is " + by_third(factor(0), factor(1), factor(2)) +
           weight;
  }
  const auto piece = [&](std::size_t k) { return closed_piece(thirds.of_third(k), "η", digits); };
  if (!piece(0).text.empty()) {
    const auto text = [&](std::size_t k) { return in_own_units(first.response(), piece(k)); };
    return start + by_third(text(0), text(1), text(2)) + where + weight;
  }
  return start + averaged_text(first, " of the row's third of the predictions") + where +
         ", and the thirds end at η = " + signed_figure(thirds.cuts()[0], digits) + " and " +
         signed_figure(thirds.cuts()[1], digits);
}

std::string formula_validity(const Smearing& smearing, int digits) {
  const forms::Interval domain = forms::inverse_domain(smearing.response());
  std::string edges = edge_text(domain.lower, domain.lower_closed, true, digits);
  const std::string upper = edge_text(domain.upper, domain.upper_closed, false, digits);
  if (!edges.empty() && !upper.empty()) edges += ", those ";
  edges += upper;
  if (edges.empty()) return {};
  const std::string arguments = smearing.weighted() ? "arguments η + e/√w " : "arguments η + e ";
  if (smearing.kind() != forms::Kind::sqrt) return arguments + edges;
  const double from = std::max(0.0, -smearing.smallest_residual());
  return "holds where η, the form-scale prediction, is at least " + figure(from, digits) + "; below that, " +
         arguments + edges;
}

}  // namespace formsieve::backtransform

#include "expression.hpp"

#include <cmath>
#include <cstdlib>
#include <stdexcept>
#include <vector>

namespace formsieve::forms::tests {

namespace {

using Real = long double;

Real yeo_johnson(Real u, Real l) {
  if (u >= 0) return l == 0 ? std::log1p(u) : std::expm1(l * std::log1p(u)) / l;
  const Real m = 2 - l;
  return m == 0 ? -std::log1p(-u) : -std::expm1(m * std::log1p(-u)) / m;
}

Real yeo_johnson_inverse(Real z, Real l) {
  if (z < 0) return -yeo_johnson_inverse(-z, 2 - l);
  return l == 0 ? std::expm1(z) : std::expm1(std::log1p(l * z) / l);
}

Real cubed_part(Real d) { return d > 0 ? d * d * d : 0; }

Real spline(Real u, const std::vector<Real>& t, std::size_t j) {
  const Real last = t.back(), before = t[t.size() - 2], range = last - t.front();
  const Real sum = cubed_part(u - t[j]) - cubed_part(u - before) * (last - t[j]) / (last - before) +
                   cubed_part(u - last) * (before - t[j]) / (last - before);
  return sum / (range * range);
}

class Reader {
 public:
  Reader(const std::string& text, const std::map<std::string, Real>& names) : text_{text}, names_{names} {}

  Real whole() {
    const Real value = sum();
    if (at_ != text_.size()) fail();
    return value;
  }

 private:
  [[noreturn]] void fail() const { throw std::runtime_error("cannot read '" + text_.substr(at_) + "' in " + text_); }

  bool take(const std::string& token) {
    while (at_ < text_.size() && text_[at_] == ' ') ++at_;
    if (text_.compare(at_, token.size(), token) != 0) return false;
    at_ += token.size();
    return true;
  }
  void need(const std::string& token) {
    if (!take(token)) fail();
  }

  Real sum() {
    Real value = product();
    for (;;) {
      if (take("+"))
        value += product();
      else if (take("−"))
        value -= product();
      else
        return value;
    }
  }

  Real product() {
    Real value = sign();
    for (;;) {
      if (take("·"))
        value *= sign();
      else if (take("/"))
        value /= sign();
      else
        return value;
    }
  }

  Real sign() { return take("−") ? -sign() : powers(); }

  Real powers() {
    Real value = factor();
    for (;;) {
      if (take("²"))
        value *= value;
      else if (take("³"))
        value *= value * value;
      else if (take("^"))
        value = std::pow(value, factor());
      else
        return value;
    }
  }

  Real in_parentheses() {
    need("(");
    const Real value = sum();
    need(")");
    return value;
  }

  std::vector<Real> arguments() {
    need("(");
    std::vector<Real> list{sum()};
    while (take(";") || take(",")) list.push_back(sum());
    need(")");
    return list;
  }

  Real factor() {
    if (take("⁵√")) return odd_root(in_parentheses(), 5);
    if (take("√")) return std::sqrt(in_parentheses());
    if (take("∛")) return std::cbrt(in_parentheses());
    if (take("ln(")) return --at_, std::log(in_parentheses());
    if (take("log10(")) return --at_, std::log10(in_parentheses());
    if (take("exp(")) return --at_, std::exp(in_parentheses());
    if (take("asinh(")) return --at_, std::asinh(in_parentheses());
    if (take("sinh(")) return --at_, std::sinh(in_parentheses());
    if (take("arcsin(")) return --at_, std::asin(in_parentheses());
    if (take("sin(")) return --at_, std::sin(in_parentheses());
    if (take("logit(")) return --at_, logit(in_parentheses());
    return family();
  }

  static Real odd_root(Real z, Real degree) { return std::copysign(std::pow(std::fabs(z), 1 / degree), z); }
  static Real logit(Real u) { return std::log(u / (1 - u)); }

  Real family() {
    if (take("YJ⁻¹")) {
      const std::vector<Real> a = arguments();
      return yeo_johnson_inverse(a.at(0), a.at(1));
    }
    if (take("YJ")) {
      const std::vector<Real> a = arguments();
      return yeo_johnson(a.at(0), a.at(1));
    }
    for (const std::size_t j : {1u, 2u, 3u})
      if (take("spline" + std::to_string(j))) {
        const std::vector<Real> a = arguments();
        return spline(a.at(0), {a.begin() + 1, a.end()}, j - 1);
      }
    return name_or_number();
  }

  Real name_or_number() {
    for (const auto& [name, value] : names_)
      if (take(name)) return value;
    if (at_ < text_.size() && text_[at_] == '(') return in_parentheses();
    char* end = nullptr;
    // The decimal as a double reads it: that is the number the form holds.
    const double number = std::strtod(text_.c_str() + at_, &end);
    if (end == text_.c_str() + at_) fail();
    at_ = static_cast<std::size_t>(end - text_.c_str());
    return number;
  }

  const std::string& text_;
  const std::map<std::string, Real>& names_;
  std::size_t at_ = 0;
};

}  // namespace

long double value_of(const std::string& formula, const std::map<std::string, long double>& names) {
  return Reader(formula, names).whole();
}

}  // namespace formsieve::forms::tests

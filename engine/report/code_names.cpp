#include "report/code_names.hpp"

#include <algorithm>
#include <cctype>
#include <iterator>
#include <set>
#include <sstream>

namespace formsieve::report {

namespace {

/// Words of C and Python, names that their headers may define as macros, and the functions that the formulas call.
constexpr const char* kTakenWords =
    "auto break case char const continue default do double else enum extern float for goto if inline int "
    "long register restrict return short signed sizeof static struct switch typedef union unsigned void "
    "volatile while bool true false nullptr constexpr typeof asm alignas alignof thread_local "
    "static_assert typeof_unqual linux unix i386 False None True and as assert async await class def del "
    "elif except finally from global import in is lambda nonlocal not or pass raise try with yield math "
    "exp log log10 pow sqrt cbrt sinh cosh asinh atan sin fabs expm1 log1p isfinite isnan strcmp abs "
    "size_t eta mean sum len isinstance str new delete template namespace operator private public "
    "protected this throw catch using virtual friend explicit export mutable typename wchar_t signbit "
    "fpclassify isinf ";

std::set<std::string> split_words(const std::string& text) {
  std::istringstream words(text);
  return {std::istream_iterator<std::string>(words), {}};
}

const std::set<std::string>& taken_words() {
  static const std::set<std::string> kWords = split_words(kTakenWords);
  return kWords;
}

/// Capitals alone may be a macro of a header.
bool may_be_taken(const std::string& name) {
  const bool has_small = std::any_of(name.begin(), name.end(), [](unsigned char c) { return std::islower(c) != 0; });
  return taken_words().contains(name) || !has_small || name.starts_with("formsieve_");
}

std::string name_of(const std::string& column) {
  std::string name;
  for (const char c : column) {
    const auto byte = static_cast<unsigned char>(c);
    name += byte < 0x80 && std::isalnum(byte) != 0 ? c : '_';
  }
  const bool starts_badly =
      name.empty() || name.front() == '_' || std::isdigit(static_cast<unsigned char>(name.front()));
  if (starts_badly) name = "x_" + name;
  return may_be_taken(name) ? name + "_" : name;
}

}  // namespace

void name_inputs(std::vector<Input>& inputs) {
  std::set<std::string> given;
  for (Input& input : inputs) {
    const std::string wanted = name_of(input.column);
    input.name = wanted;
    for (int i = 2; !given.insert(input.name).second; ++i) input.name = wanted + "_" + std::to_string(i);
  }
}

std::string one_line_text(const std::string& text) {
  std::string line = text;
  for (char& c : line)
    if (static_cast<unsigned char>(c) < 0x20 || c == 0x7F) c = ' ';
  return line;
}

}  // namespace formsieve::report

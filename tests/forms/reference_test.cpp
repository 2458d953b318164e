// Values from outside the project: tests/reference/forms/forms.csv, written by make_forms_reference.py beside it with
// SciPy 1.10.1, NumPy 1.24.2 and definitions in 720-digit arithmetic.
#include <formsieve/forms.hpp>

#include <catch2/catch.hpp>

#include <cmath>
#include <fstream>
#include <map>
#include <sstream>

using namespace formsieve::forms;

namespace {

struct Line {
  Form form;
  double x;
  std::string column;
  double value;
  std::string source;
};

std::vector<Line> reference_lines() {
  std::ifstream file(FORMSIEVE_SOURCE_DIR "/tests/reference/forms/forms.csv");
  std::vector<Line> lines;
  std::string text;
  std::getline(file, text);  // versions
  std::getline(file, text);  // header
  while (std::getline(file, text)) {
    std::stringstream cells(text);
    std::string form, parameters, x, value;
    Line line;
    std::getline(cells, form, ',');
    std::getline(cells, parameters, ',');
    std::getline(cells, x, ',');
    std::getline(cells, line.column, ',');
    std::getline(cells, value, ',');
    std::getline(cells, line.source, ',');
    line.form.kind = kind_from_name(form).value();
    std::stringstream numbers(parameters);
    for (std::string number; numbers >> number;) line.form.parameters.push_back(std::strtod(number.c_str(), nullptr));
    line.x = std::strtod(x.c_str(), nullptr);
    line.value = std::strtod(value.c_str(), nullptr);
    lines.push_back(line);
  }
  return lines;
}

double tolerance(const Line& line) {
  constexpr double kEps = 2.3e-16;
  const double size = std::fabs(line.value);
  const double ln_w = std::fabs(std::log1p(std::fabs(line.x)));
  double allowed = 4.0 * kEps * size;
  // In doubles SciPy loses a unit of 1 near zero, and λ·ln x units of the last place far from 1.
  if (line.source == "scipy") allowed += 4.0 * kEps * (1.0 + 2.0 * ln_w * size);
  // The exponent 2 − λ of the left half is rounded once.
  if (line.form.kind == Kind::yeo_johnson) allowed += 2.0 * kEps * ln_w * size;
  return allowed;
}

}  // namespace

TEST_CASE("forms: values equal those of SciPy, NumPy and of the definitions in long arithmetic", "[forms][reference]") {
  const std::vector<Line> lines = reference_lines();
  REQUIRE(lines.size() > 1300);
  std::map<std::string, int> compared;
  for (const Line& line : lines) {
    double value;
    if (line.column == "inverse") {
      value = inverse(line.form, line.x);
    } else {
      std::vector<double> columns(n_columns(line.form));
      evaluate(line.form, line.x, columns);
      value = columns.at(std::stoul(line.column));
    }
    INFO(term_name(line.form, "x") << " at " << line.x << " column " << line.column << " (" << line.source
                                   << "): " << value << " against " << line.value);
    CHECK(std::fabs(value - line.value) <= tolerance(line));
    ++compared[line.source];
  }
  CHECK(compared["scipy"] > 300);
  CHECK(compared["numpy"] > 50);
  CHECK(compared["decimal"] > 800);
}

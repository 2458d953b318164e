// Equations as code, run in each language, against the scoring of the library.
#include "made_equations.hpp"
#include "sheet_words.hpp"

#include <formsieve/report.hpp>

#include <catch2/catch.hpp>
#include <sqlite3.h>

#include <algorithm>
#include <cmath>
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <limits>
#include <memory>
#include <sstream>

namespace formsieve::report::test {

namespace {

using forms::Kind;
using model::Model;
using model::ModelSet;

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

bool has_closed_form(const Model& model) {
  switch (model.response.kind) {
    case Kind::identity:
    case Kind::ln:
    case Kind::log10:
    case Kind::cube_root:
    case Kind::asinh:
    case Kind::sqrt:
      return true;
    case Kind::box_cox:
      return model.response.parameters.front() == 0.0;
    default:
      return false;
  }
}

/// What SQL and a spreadsheet give: without residuals, a factor where there is no closed form.
double without_residuals(const Case& one, std::size_t row) {
  if (!has_closed_form(one.model())) return *one.factor * one.median[row];
  if (one.model().response.kind != Kind::sqrt || std::isnan(one.expected[row])) return one.expected[row];
  const auto& rule = one.model().mean;
  std::size_t part = 0;
  while (part < rule.cuts.size() && one.eta[row] > rule.cuts[part]) ++part;
  return one.eta[row] + rule.parts[part].smallest >= 0.0 ? one.expected[row] : kNaN;
}

void check_value(const Case& one, std::size_t row, double value, double expected) {
  INFO(forms::label(one.model().response, one.set.response)
       << " row " << row << ", η = " << one.eta[row] << ": " << value << " for " << expected);
  REQUIRE(std::isnan(value) == std::isnan(expected));
  if (!std::isnan(value)) REQUIRE(std::abs(value - expected) <= 1e-12 * std::max(1.0, std::abs(expected)));
}

std::string code(const Case& one, CodeLanguage language) {
  const auto text = equation_code(one.set, one.model(), language, one.factor);
  REQUIRE(text.ok());
  return *text;
}

/// A folder of its own, removed at the end.
class Workshop {
 public:
  Workshop() {
    std::string name = (std::filesystem::temp_directory_path() / "equation_code_XXXXXX").string();
    REQUIRE(mkdtemp(name.data()) != nullptr);
    path_ = name;
  }
  ~Workshop() { std::filesystem::remove_all(path_); }
  Workshop(const Workshop&) = delete;
  Workshop& operator=(const Workshop&) = delete;

  void write(const std::string& name, const std::string& text) const { std::ofstream(path_ + "/" + name) << text; }
  /// One number a line that the command prints.
  std::vector<double> numbers_from(const std::string& command) const {
    const std::string line = "cd '" + path_ + "' && (" + command + ") > out.txt 2> err.txt";
    const int status = std::system(line.c_str());
    std::ifstream err(path_ + "/err.txt"), out(path_ + "/out.txt");
    std::stringstream complaint;
    complaint << err.rdbuf();
    INFO(complaint.str());
    REQUIRE(status == 0);
    std::vector<double> numbers;
    for (std::string text; std::getline(out, text);) numbers.push_back(std::strtod(text.c_str(), nullptr));
    return numbers;
  }

 private:
  std::string path_;
};

std::string number_literal(double value) {
  std::ostringstream text;
  text.precision(17);
  text << value;
  return text.str();
}

/// Both C and Python read it.
std::string text_literal(const std::string& text) {
  std::string literal = "\"";
  for (const char c : text) {
    if (c == '"' || c == '\\') literal += '\\';
    literal += c;
  }
  return literal + "\"";
}

std::string arguments(const Case& one, std::size_t row, const std::string& no_number, const std::string& no_text) {
  std::string text;
  for (std::size_t t = 0; t < one.rows[row].size(); ++t) {
    const Cell& cell = one.rows[row][t];
    const bool is_text = one.model().terms[t].form.kind == Kind::levels;
    text += t == 0 ? "" : ", ";
    if (cell.missing) {
      text += is_text ? no_text : no_number;
    } else {
      text += is_text ? text_literal(cell.text) : number_literal(cell.value);
    }
  }
  return text;
}

void check_all(const std::vector<double>& values, bool with_residuals) {
  std::size_t at = 0, defined = 0;
  for (const Case& one : cases())
    for (std::size_t row = 0; row < one.rows.size(); ++row) {
      REQUIRE(at < values.size());
      defined += std::isnan(values[at]) ? 0 : 1;
      check_value(one, row, values[at++], with_residuals ? one.expected[row] : without_residuals(one, row));
    }
  CHECK(at == values.size());
  CHECK(defined > values.size() / 4);
  CHECK(defined < values.size());
}

/// The two formulas of the last line.
std::pair<std::string, std::string> sheet_formulas(const std::string& text) {
  const std::size_t eta = text.find("\t=IFERROR(") + 1, mean = text.find("\t=IFERROR(", eta) + 1;
  return {text.substr(eta, mean - 1 - eta), text.substr(mean, text.size() - 1 - mean)};
}

struct Database {
  Database() { REQUIRE(sqlite3_open(":memory:", &handle) == SQLITE_OK); }
  ~Database() { sqlite3_close(handle); }
  void run(const std::string& text) const {
    INFO(text << "\n" << sqlite3_errmsg(handle));
    REQUIRE(sqlite3_exec(handle, text.c_str(), nullptr, nullptr, nullptr) == SQLITE_OK);
  }
  /// The last column of each row of the query, NaN for NULL.
  std::vector<double> last_column(const std::string& query) const {
    sqlite3_stmt* statement = nullptr;
    const int prepared = sqlite3_prepare_v2(handle, query.c_str(), -1, &statement, nullptr);
    INFO(query << "\n" << sqlite3_errmsg(handle));
    REQUIRE(prepared == SQLITE_OK);
    std::vector<double> values;
    while (sqlite3_step(statement) == SQLITE_ROW) {
      const int last = sqlite3_column_count(statement) - 1;
      const bool null = sqlite3_column_type(statement, last) == SQLITE_NULL;
      values.push_back(null ? kNaN : sqlite3_column_double(statement, last));
    }
    sqlite3_finalize(statement);
    return values;
  }
  sqlite3* handle = nullptr;
};

std::string sql_literal(const Cell& cell, bool is_text) {
  if (cell.missing) return "NULL";
  if (!is_text) return number_literal(cell.value);
  std::string literal = "'";
  for (const char c : cell.text) literal += c == '\'' ? "''" : std::string(1, c);
  return literal + "'";
}

void fill_table(const Database& database, const Case& one) {
  std::string columns;
  for (const model::Term& term : one.model().terms) {
    std::string name;
    for (const char c : term.column) name += c == '"' ? "\"\"" : std::string(1, c);
    columns += (columns.empty() ? "\"" : ", \"") + name + (term.form.kind == Kind::levels ? "\" TEXT" : "\" REAL");
  }
  database.run("DROP TABLE IF EXISTS your_table; CREATE TABLE your_table (" + columns + ")");
  for (const Row& row : one.rows) {
    std::string values;
    for (std::size_t t = 0; t < row.size(); ++t)
      values += (t == 0 ? "" : ", ") + sql_literal(row[t], one.model().terms[t].form.kind == Kind::levels);
    database.run("INSERT INTO your_table VALUES (" + values + ")");
  }
}

}  // namespace

TEST_CASE("report: an equation in C gives the means of the library", "[report][property]") {
  const Workshop workshop;
  std::string text, body = "#include <stdio.h>\nint main(void) {\n";
  for (const Case& one : cases()) {
    const std::string name = "mean_of_" + one.set.response;
    workshop.write(name + ".c", code(one, CodeLanguage::c));
    // One run of the compiler for all: the helpers of each get names of their own.
    for (const std::string helper : {"formsieve_inverse", "formsieve_mean_over"})
      text += "#undef " + helper + "\n#define " + helper + " " + helper + "_" + one.set.response + "\n";
    text += "#include \"" + name + ".c\"\n";
    for (std::size_t row = 0; row < one.rows.size(); ++row)
      body += "printf(\"%.17g\\n\", " + name + "(" + arguments(one, row, "NAN", "NULL") + "));\n";
  }
  workshop.write("main.c", text + body + "return 0;\n}\n");
  check_all(workshop.numbers_from("cc -std=c99 -O0 -Wall -Werror -ffp-contract=off main.c -lm -o run && ./run"), true);
}

TEST_CASE("report: an equation in Python gives the means of the library", "[report][property]") {
  const Workshop workshop;
  std::string text;
  for (const Case& one : cases()) {
    text += code(one, CodeLanguage::python) + "\n";
    for (std::size_t row = 0; row < one.rows.size(); ++row)
      text += "print(repr(mean_of_" + one.set.response + "(" +
              arguments(one, row, row % 2 == 0 ? "None" : "math.nan", "None") + ")))\n";
  }
  workshop.write("run.py", text);
  check_all(workshop.numbers_from("python3 run.py"), true);
}

TEST_CASE("report: an equation in SQL gives the means of the library", "[report][property]") {
  const Database database;
  std::vector<double> values;
  for (const Case& one : cases()) {
    fill_table(database, one);
    const std::vector<double> of_case = database.last_column(code(one, CodeLanguage::sql));
    REQUIRE(of_case.size() == one.rows.size());
    values.insert(values.end(), of_case.begin(), of_case.end());
  }
  check_all(values, false);
}

TEST_CASE("report: text in a column of numbers gives NULL in SQL", "[report][unit]") {
  const Case& one = cases().front();
  const Database database;
  fill_table(database, one);
  CHECK_FALSE(std::isnan(database.last_column(code(one, CodeLanguage::sql)).front()));
  database.run("UPDATE your_table SET \"eta\" = 'none'");
  for (const double value : database.last_column(code(one, CodeLanguage::sql))) CHECK(std::isnan(value));
}

TEST_CASE("report: an equation for a spreadsheet gives the means of the library", "[report][property]") {
  const Workshop workshop;
  std::string text = kSheetWords;
  for (const Case& one : cases()) {
    const auto [eta, mean] = sheet_formulas(code(one, CodeLanguage::spreadsheet));
    workshop.write(one.set.response + ".txt", eta + "\n" + mean);
    text += "eta, mean = [python(f) for f in open(\"" + one.set.response + ".txt\").read().split(\"\\n\")]\n";
    for (std::size_t row = 0; row < one.rows.size(); ++row)
      text += "print(repr(row_value(eta, mean, " + std::to_string(one.rows[row].size()) + ", [" +
              arguments(one, row, row % 2 == 0 ? "None" : "\"none\"", "None") + "])))\n";
  }
  workshop.write("run.py", text);
  check_all(workshop.numbers_from("python3 run.py"), false);
}

TEST_CASE("report: what a language cannot say is refused and another one named", "[report][unit]") {
  Case one = cases()[8];  // reciprocal
  one.factor.reset();
  for (const CodeLanguage language : {CodeLanguage::sql, CodeLanguage::spreadsheet}) {
    const auto text = equation_code(one.set, one.model(), language, one.factor);
    REQUIRE_FALSE(text.ok());
    CHECK(text.error().kind == ErrorKind::usage);
    CHECK_THAT(text.error().hint, Catch::Contains("--as python"));
  }
  Model& model = one.set.models.front();
  model.mean.parts.push_back(model.mean.parts.front());
  model.mean.cuts = {2.0};
  CHECK_FALSE(equation_code(one.set, model, CodeLanguage::sql, 1.25).ok());
  CHECK(equation_code(one.set, model, CodeLanguage::c, {}).ok());
}

TEST_CASE("report: the comments say what an equation holds for", "[report][unit]") {
  for (const CodeLanguage language :
       {CodeLanguage::text, CodeLanguage::spreadsheet, CodeLanguage::sql, CodeLanguage::c, CodeLanguage::python}) {
    Case one = cases()[1];
    one.set.weight = "w";
    const std::string text = code(one, language);
    for (const char* part : {"Association is not cause", "outside these ranges", "after a search", "weight 1",
                             "seen from 0 to 10; defined above -0.5", "any other text gives no value"})
      CHECK_THAT(text, Catch::Contains(part));
  }
  CHECK_THAT(code(cases()[8], CodeLanguage::sql), Catch::Contains("An approximation"));
  CHECK_THAT(code(cases()[1], CodeLanguage::text), Catch::StartsWith("y1 = 1.0"));
}

}  // namespace formsieve::report::test

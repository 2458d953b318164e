// New rows scored by models of a run folder: against the run itself, against statsmodels, and where it must refuse.
#include "support.hpp"

#include "backtransform/corrections.hpp"

#include <formsieve/pipeline.hpp>
#include <formsieve/report.hpp>

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <fstream>
#include <random>
#include <sstream>

namespace formsieve::test {

namespace {

const std::string kReference = std::string(FORMSIEVE_SOURCE_DIR) + "/tests/reference/";

table::ByteStream stream_of(const std::string& text) {
  return {[&text, at = std::size_t{0}](std::span<char> into) mutable -> Result<std::size_t> {
            const std::size_t n = std::min(into.size(), text.size() - at);
            std::copy_n(text.data() + at, n, into.data());
            at += n;
            return n;
          },
          text.size()};
}

struct Applied {
  std::string text;
  pipeline::ApplySummary summary;
};

Result<Applied> apply_to(const model::ModelSet& set, const std::string& rank, const std::string& table,
                         pipeline::ApplyOptions options = {}) {
  options.source = "new.csv";
  Applied applied;
  const auto model = pipeline::find_model(set, rank);
  if (!model) return model.error();
  const auto summary = pipeline::apply(set, **model, stream_of(table), options, [&](std::string_view piece) {
    applied.text += piece;
    return Result<bool>(true);
  });
  if (!summary) return summary.error();
  applied.summary = *summary;
  return applied;
}

Applied applied_or_fail(const model::ModelSet& set, const std::string& rank, const std::string& table,
                        const pipeline::ApplyOptions& options = {}) {
  auto applied = apply_to(set, rank, table, options);
  if (!applied) FAIL(applied.error().message << " | " << applied.error().where << " | " << applied.error().hint);
  return *std::move(applied);
}

model::ModelSet models_of(const TemporaryFolder& folder) {
  auto set = pipeline::open_models(folder.file("out.run"));
  if (!set) FAIL(set.error().message << " | " << set.error().where);
  return *std::move(set);
}

/// Cells of a CSV without quotes, header left out.
std::vector<std::vector<std::string>> cells_of(const std::string& csv) {
  std::vector<std::vector<std::string>> rows;
  std::istringstream lines(csv);
  std::string line;
  std::getline(lines, line);
  while (std::getline(lines, line)) {
    auto& row = rows.emplace_back();
    std::size_t at = 0;
    for (std::size_t comma = line.find(','); comma != line.npos; comma = line.find(',', at)) {
      row.push_back(line.substr(at, comma - at));
      at = comma + 1;
    }
    row.push_back(line.substr(at));
  }
  return rows;
}

std::string demo_table() { return read_text(std::string(FORMSIEVE_SOURCE_DIR) + "/demo-data/coldstores.csv"); }

/// A small search of the demo table: three response forms, levels, a spline, reflected forms.
const TemporaryFolder& demo_run() {
  static const TemporaryFolder folder;
  static const nlohmann::json listed = [] {
    run::Plan plan = plan_for(folder.write("demo.csv", demo_table()), "energy_kwh");
    plan.forms.response = {form_entry("identity"), form_entry("sqrt"), form_entry("ln"), form_entry("reciprocal")};
    plan.forms.of["floor_area_m2"] = {form_entry("ln"), form_entry("identity")};
    plan.forms.of["throughput_t"] = {form_entry("spline", {4}), form_entry("sqrt")};
    run::FormEntry reflected = form_entry("sqrt");
    reflected.reflect = 101.0;
    plan.forms.of["fill_percent"] = {reflected, form_entry("identity")};
    plan.forms.of["cooling"] = {form_entry("levels")};
    plan.data.ignore = {"volume_m3", "door_openings", "night_share", "outdoor_c", "paint_batch"};
    plan.rank.shortlist = 60;
    return search_json(plan, folder);
  }();
  (void)listed;
  return folder;
}

run::Plan trees_plan(const std::string& form) {
  run::Plan plan = plan_for(kReference + "open/trees.csv", "volume");
  plan.forms.response = {form_entry(form)};
  for (const char* column : {"girth", "height"}) plan.forms.of[column] = {form_entry(form)};
  plan.forms.always = {"girth", "height"};
  return plan;
}

}  // namespace

TEST_CASE("pipeline: apply gives the fits and prediction intervals of statsmodels for the trees",
          "[pipeline][reference]") {
  const auto reference = nlohmann::json::parse(read_text(kReference + "intervals/trees.json"));
  std::string table = "height,girth\n";
  for (std::size_t i = 0; i < reference.at("girth").size(); ++i)
    table += reference.at("height")[i].dump() + "," + reference.at("girth")[i].dump() + "\n";
  for (const std::string form : {"identity", "ln"}) {
    const TemporaryFolder folder;
    (void)search_json(trees_plan(form), folder);
    const model::ModelSet set = models_of(folder);
    REQUIRE(set.models.size() == 1);
    const auto& expected = reference.at(form);
    for (std::size_t j = 0; j < 3; ++j)
      CHECK(set.models[0].coefficients[j] == Approx(expected.at("coefficients")[j].get<double>()).epsilon(1e-10));
    const auto rows = cells_of(applied_or_fail(set, "best", table).text);
    REQUIRE(rows.size() == 33);
    const auto own = [&](const nlohmann::json& value) {
      return form == "ln" ? std::exp(value.get<double>()) : value.get<double>();
    };
    const double factor = form == "ln" ? expected.at("smearing").get<double>() : 1.0;
    for (std::size_t i = 0; i < rows.size(); ++i) {
      CAPTURE(form, i);
      CHECK(std::stod(rows[i][0]) == Approx(factor * own(expected.at("mean")[i])).epsilon(2e-9));
      CHECK(std::stod(rows[i][1]) == Approx(own(expected.at("mean")[i])).epsilon(2e-9));
      CHECK(std::stod(rows[i][2]) == Approx(own(expected.at("lower")[i])).epsilon(2e-9));
      CHECK(std::stod(rows[i][3]) == Approx(own(expected.at("upper")[i])).epsilon(2e-9));
      CHECK(rows[i][6] == (i < 31    ? ""
                           : i == 31 ? "outside girth; outside height; leverage"
                                     : "outside girth; outside height; leverage"));
    }
  }
}

TEST_CASE("pipeline: every model of a run gives its own training rows back", "[pipeline][property]") {
  const TemporaryFolder& folder = demo_run();
  const model::ModelSet set = models_of(folder);
  const auto run = pipeline::open_run(folder.file("out.run"));
  REQUIRE(run.ok());
  REQUIRE(set.models.size() == run->candidates.size());
  const run::Plan plan = plan_for(folder.file("demo.csv"), "energy_kwh");
  const auto table = pipeline::load_table(plan);
  REQUIRE(table.ok());
  const auto& measured = table->columns[*table->find("energy_kwh")].numbers;
  pipeline::ApplyOptions options;
  options.keep = {"energy_kwh"};
  for (std::size_t m = 0; m < set.models.size(); ++m) {
    CAPTURE(set.models[m].equation);
    const Applied applied = applied_or_fail(set, std::to_string(set.models[m].rank), demo_table(), options);
    const auto rows = cells_of(applied.text);
    REQUIRE(rows.size() == measured.size());
    double sse = 0.0, sum = 0.0, squares = 0.0;
    std::size_t n = 0, inside = 0;
    for (std::size_t i = 0; i < rows.size(); ++i) {
      // Rows in use are complete in every searched predictor; the shortlist's R² is over them alone.
      if (rows[i][0].empty()) continue;
      const bool complete = std::all_of(table->columns.begin(), table->columns.end(), [&](const table::Column& column) {
        for (const char* used : {"floor_area_m2", "throughput_t", "fill_percent", "cooling"})
          if (column.name == used)
            return column.type == table::ColumnType::text ? column.codes[i] != table::kMissingLevel
                                                          : !std::isnan(column.numbers[i]);
        return true;
      });
      if (!complete || !run->candidates[m].r2_own_units) continue;
      REQUIRE_FALSE(rows[i][1].empty());
      CHECK(rows[i][7].find("leverage") == std::string::npos);
      CHECK(rows[i][7].find("outside") == std::string::npos);
      const double mean = std::stod(rows[i][1]), y = measured[i];
      sse += (y - mean) * (y - mean);
      sum += y;
      squares += y * y;
      ++n;
      const double low = rows[i][5].empty() ? -INFINITY : std::stod(rows[i][5]);
      const double high = rows[i][6].empty() ? INFINITY : std::stod(rows[i][6]);
      inside += low <= y && y <= high ? 1 : 0;
    }
    if (!run->candidates[m].r2_own_units) continue;
    REQUIRE(n == run->data.rows_used);
    const double tss = squares - sum * sum / static_cast<double>(n);
    // The R² of a run is that of smearing, whatever is used.
    if (set.models[m].mean.method == "smearing")
      CHECK(1.0 - sse / tss == Approx(*run->candidates[m].r2_own_units).epsilon(1e-7));
    CHECK(static_cast<double>(inside) / static_cast<double>(n) > 0.93);
  }
}

TEST_CASE("pipeline: what apply writes depends neither on blocks nor on threads", "[pipeline][property][parallel]") {
  const model::ModelSet set = models_of(demo_run());
  std::string table = demo_table();
  const std::size_t header = table.find('\n') + 1;
  for (int i = 0; i < 3; ++i)
    table += table.substr(header, 20000 - 20000 % 7).substr(0, table.find('\n', 19000) + 1 - header);
  if (table.back() != '\n') table.erase(table.rfind('\n') + 1);
  pipeline::ApplyOptions options;
  options.keep = {"site_id", "cooling"};
  if (table.substr(0, header).find("site_id") == std::string::npos) options.keep = {"cooling"};
  for (const bool json : {false, true}) {
    options.json = json;
    options.threads = 1;
    options.block_bytes = pipeline::kApplyBlockBytes;
    const std::string whole = applied_or_fail(set, "1", table, options).text;
    for (const std::size_t block_bytes : {100UL, 1000UL, 4096UL, 30000UL})
      for (const unsigned threads : {1U, 2U, 3U}) {
        options.block_bytes = block_bytes;
        options.threads = threads;
        REQUIRE(applied_or_fail(set, "1", table, options).text == whole);
      }
  }
}

TEST_CASE("pipeline: apply flags what a model cannot or should not say", "[pipeline][unit]") {
  const model::ModelSet set = models_of(demo_run());
  const auto wanted = std::find_if(set.models.begin(), set.models.end(), [](const model::Model& model) {
    return model.terms.size() == 4 && model.response.kind == forms::Kind::ln &&
           std::any_of(model.terms.begin(), model.terms.end(),
                       [](const model::Term& term) { return term.form.reflect.has_value(); });
  });
  REQUIRE(wanted != set.models.end());
  const std::string cooling = wanted->terms.back().form.levels.empty() ? "" : wanted->terms.back().form.levels.front();
  REQUIRE_FALSE(cooling.empty());
  const auto row = [](const std::string& area, const std::string& tons, const std::string& fill,
                      const std::string& kind) { return area + "," + tons + "," + fill + "," + kind + "\n"; };
  const auto middle = [&](std::size_t t) {
    return std::to_string(0.5 * (wanted->terms[t].seen_min + wanted->terms[t].seen_max));
  };
  std::string names;
  for (const auto& term : wanted->terms) names += (names.empty() ? "" : ",") + term.column;
  REQUIRE(names == "floor_area_m2,throughput_t,fill_percent,cooling");
  const std::string table = names + "\n" + row("NA", middle(1), "80", cooling) + row(middle(0), middle(1), "80", "") +
                            row(middle(0), middle(1), "80", "steam") + row("-5", middle(1), "102", cooling) +
                            row("1e7", middle(1), "80", cooling);
  const Applied applied = applied_or_fail(set, std::to_string(wanted->rank), table);
  const auto rows = cells_of(applied.text);
  REQUIRE(rows.size() == 5);
  CHECK(rows[0][6] == "missing floor_area_m2");
  CHECK(rows[1][6] == "missing cooling");
  CHECK(rows[2][6] == "unknown level cooling");
  CHECK(rows[3][6].find("undefined fill_percent") != std::string::npos);
  CHECK(rows[3][6].find("outside floor_area_m2") != std::string::npos);
  CHECK(rows[4][6].find("outside floor_area_m2") == 0);
  CHECK(rows[4][6].find("leverage") != std::string::npos);
  for (std::size_t i = 0; i < 4; ++i)
    for (std::size_t c = 0; c < 6; ++c) CHECK(rows[i][c].empty());
  for (std::size_t c = 0; c < 6; ++c) CHECK_FALSE(rows[4][c].empty());
  CHECK(applied.summary.rows == 5);
  CHECK(applied.summary.scored == 1);
  CHECK(applied.summary.flagged == 5);
  CHECK(applied.summary.by_flag[0] == 2);
}

TEST_CASE("pipeline: a weight column of the new table narrows its intervals", "[pipeline][unit]") {
  const TemporaryFolder folder;
  std::string table = "y,x,w\n";
  for (int i = 0; i < 60; ++i) {
    const double x = 1.0 + 0.3 * i, w = 1.0 + i % 4;
    table += std::to_string(2.0 + x + std::sin(17.0 * i) / std::sqrt(w)) + "," + std::to_string(x) + "," +
             std::to_string(w) + "\n";
  }
  run::Plan plan = plan_for(folder.write("w.csv", table), "y");
  plan.data.weight = "w";
  plan.forms.response = {form_entry("identity")};
  plan.forms.of["x"] = {form_entry("identity")};
  (void)search_json(plan, folder);
  const model::ModelSet set = models_of(folder);
  CHECK(set.weight == "w");
  const auto width = [&](const std::string& data, std::size_t row, std::size_t low) {
    const auto rows = cells_of(applied_or_fail(set, "1", data).text);
    return std::stod(rows[row][low + 1]) - std::stod(rows[row][low]);
  };
  const std::string with = "x,w\n5,1\n5,100\n5,\n";
  for (const std::size_t low : {2UL, 4UL}) {
    CHECK(width(with, 1, low) < 0.3 * width(with, 0, low));
    CHECK(width(with, 2, low) == width(with, 0, low));
    CHECK(width("x\n5\n", 0, low) == width(with, 0, low));
  }
  CHECK(cells_of(applied_or_fail(set, "1", "x,w\n5,-1\n").text)[0][6] == "undefined w");
}

TEST_CASE("pipeline: where spread is unequal, apply smears within thirds as the candidate does",
          "[pipeline][property]") {
  std::mt19937_64 random(12);
  std::normal_distribution<double> normal;
  std::string table = "y,x\n";
  std::vector<double> x, y;
  for (int i = 0; i < 900; ++i) {
    x.push_back(std::round(100.0 * std::exp(4.0 * (i % 100) / 100.0)) / 100.0);
    y.push_back(std::exp(1.0 + 0.8 * std::log(x.back()) + 0.3 * (0.1 + std::log(x.back())) * normal(random)));
    char line[64];
    std::snprintf(line, sizeof line, "%.17g,%.17g\n", y.back(), x.back());
    table += line;
  }
  const TemporaryFolder folder;
  run::Plan plan = plan_for(folder.write("t.csv", table), "y");
  plan.forms.response = {form_entry("ln")};
  plan.forms.of["x"] = {form_entry("ln")};
  plan.forms.always = {"x"};
  (void)search_json(plan, folder);
  const model::ModelSet set = models_of(folder);
  const model::Model& model = set.models.at(0);
  REQUIRE(model.mean.method == "smearing by thirds");
  REQUIRE(model.mean.parts.size() == 3);
  Eigen::VectorXd fitted(900), residuals(900);
  for (Eigen::Index i = 0; i < 900; ++i) {
    const auto row = static_cast<std::size_t>(i);
    fitted[i] = model.coefficients[0] + model.coefficients[1] * std::log(x[row]);
    residuals[i] = std::log(y[row]) - fitted[i];
  }
  const Eigen::Map<const Eigen::VectorXd> measured(y.data(), 900);
  const Eigen::VectorXd none;
  const auto plain = backtransform::make_correction(
      backtransform::Method::thirds, {model.response, fitted, residuals, none, measured, model.sigma, model.df()});
  const auto rows = cells_of(applied_or_fail(set, "1", table).text);
  REQUIRE(rows.size() == 900);
  for (std::size_t i = 0; i < rows.size(); ++i)
    CHECK(std::stod(rows[i][0]) == Approx(plain->mean({fitted[static_cast<Eigen::Index>(i)]})).epsilon(1e-8));
}

TEST_CASE("pipeline: apply refuses tables and wishes that do not fit, with what is near", "[pipeline][unit]") {
  const model::ModelSet set = models_of(demo_run());
  const auto refused = [&](const std::string& table, const pipeline::ApplyOptions& options = {}) {
    const auto applied = apply_to(set, "1", table, options);
    REQUIRE_FALSE(applied.ok());
    return applied.error();
  };
  std::string renamed = demo_table();
  renamed.replace(renamed.find("fill_percent"), 12, "fill_percnt");
  if (std::any_of(set.models[0].terms.begin(), set.models[0].terms.end(),
                  [](const model::Term& term) { return term.column == "fill_percent"; })) {
    const Error missing = refused(renamed);
    CHECK(missing.kind == ErrorKind::data);
    CHECK_THAT(missing.message, Catch::Contains("'fill_percent'"));
    CHECK_THAT(missing.hint, Catch::Contains("fill_percnt"));
    CHECK(missing.where == "new.csv");
  }
  pipeline::ApplyOptions keep;
  keep.keep = {"coolng"};
  CHECK(refused(demo_table(), keep).kind == ErrorKind::usage);
  CHECK_THAT(refused(demo_table(), keep).hint, Catch::Contains("cooling"));
  pipeline::ApplyOptions level;
  level.level = 1.0;
  CHECK(refused(demo_table(), level).kind == ErrorKind::usage);
  CHECK_FALSE(pipeline::find_model(set, "999").ok());
  CHECK_THAT(pipeline::find_model(set, "bst").error().hint, Catch::Contains("best"));
  CHECK_FALSE(pipeline::open_models("none.run").ok());
}

TEST_CASE("pipeline: models.json is the same for any number of threads", "[pipeline][property]") {
  const TemporaryFolder folder;
  const run::Plan plan = trees_plan("ln");
  (void)search_json(plan, folder, 1);
  const std::string one = read_text(folder.file("out.run") + "/models.json");
  (void)search_json(plan, folder, 3);
  CHECK(read_text(folder.file("out.run") + "/models.json") == one);
  CHECK(one.size() > 1000);
}

}  // namespace formsieve::test

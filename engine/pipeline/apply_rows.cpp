#include "pipeline/apply_rows.hpp"

#include "report/value_text.hpp"
#include "table/cells.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <span>

namespace formsieve::pipeline {

namespace {

using model::kBatchRows;

constexpr std::array<const char*, 6> kValueNames = {"mean", "median", "low_normal", "high_normal", "low_cv", "high_cv"};

std::array<const model::Scores::Values*, kValueNames.size()> values_of(const model::Scores& scores) {
  return {&scores.mean, &scores.median, &scores.low_normal, &scores.high_normal, &scores.low_cross, &scores.high_cross};
}

std::string listed(const std::vector<std::string>& names) {
  constexpr std::size_t kMostListed = 12;
  std::string text;
  for (std::size_t i = 0; i < names.size() && i <= kMostListed; ++i)
    text += (i == 0 ? "'" : ", '") + (i == kMostListed ? std::string("…") : names[i]) + "'";
  return text;
}

std::optional<std::size_t> position(const std::vector<std::string>& header, const std::string& name) {
  const auto at = std::find(header.begin(), header.end(), name);
  if (at == header.end()) return std::nullopt;
  return static_cast<std::size_t>(at - header.begin());
}

std::string known_columns(const std::vector<std::string>& header, const std::string& wanted) {
  const auto near = run::nearest(wanted, header);
  return near ? "the nearest is '" + *near + "'" : "its columns are " + listed(header);
}

Status find_kept(const std::vector<std::string>& header, const ApplyOptions& options, ApplyColumns& columns) {
  for (const std::string& name : options.keep) {
    const auto at = position(header, name);
    if (!at)
      return Error{ErrorKind::usage, "--keep names '" + name + "', which the table does not have", options.source,
                   known_columns(header, name)};
    const bool is_ours =
        name == "flags" || std::find(kValueNames.begin(), kValueNames.end(), name) != kValueNames.end();
    if (is_ours)
      return Error{ErrorKind::usage, "the column '" + name + "' cannot be kept: the scores have one of that name",
                   options.source, "rename it in the table"};
    columns.keep.push_back(*at);
  }
  return {};
}

}  // namespace

Result<ApplyColumns> find_columns(const std::vector<std::string>& header, const model::ModelSet& set,
                                  const model::Model& model, const ApplyOptions& options) {
  ApplyColumns columns;
  columns.read_as.assign(header.size(), table::ReadAs::written);
  std::vector<std::string> missing;
  for (const model::Term& term : model.terms) {
    const auto at = position(header, term.column);
    if (!at) {
      missing.push_back(term.column);
      continue;
    }
    columns.of_term.push_back(*at);
    columns.read_as[*at] = term.form.kind == forms::Kind::levels ? table::ReadAs::text : table::ReadAs::number;
  }
  if (!missing.empty())
    return Error{ErrorKind::data,
                 "the table has no column '" + missing.front() + "', which the model needs" +
                     (missing.size() > 1 ? " (missing in all: " + listed(missing) + ")" : ""),
                 options.source,
                 "name the columns as in the table of the search; " + known_columns(header, missing.front())};
  if (!set.weight.empty()) columns.weight = position(header, set.weight);
  if (columns.weight) columns.read_as[*columns.weight] = table::ReadAs::number;
  if (auto status = find_kept(header, options, columns); !status) return status.error();
  return columns;
}

std::string csv_header(const std::vector<std::string>& header, const ApplyColumns& columns) {
  std::string text;
  for (const std::size_t column : columns.keep) {
    report::append_cell(text, header[column]);
    text += ',';
  }
  for (const char* name : kValueNames) text += std::string(name) + ",";
  return text + "flags\n";
}

BlockScorer::BlockScorer(const ApplyTask& task)
    : task_(task),
      numbers_(task.columns.of_term.size() + 1),
      codes_(task.columns.of_term.size()),
      kept_(task.columns.keep.size()),
      work_(task.scorer) {}

void BlockScorer::prepare_sinks(std::size_t n_rows) {
  sinks_.clear();
  for (const table::ReadAs read_as : task_.columns.read_as) sinks_.push_back({read_as, nullptr, nullptr});
  for (std::size_t t = 0; t < task_.columns.of_term.size(); ++t) {
    table::ColumnSink& sink = sinks_[task_.columns.of_term[t]];
    numbers_[t].resize(n_rows);
    if (sink.read_as == table::ReadAs::number) sink.numbers = numbers_[t].data();
    if (sink.read_as != table::ReadAs::text) continue;
    codes_[t].resize(n_rows);
    sink.codes = codes_[t].data();
  }
  if (task_.columns.weight) {
    numbers_.back().resize(n_rows);
    sinks_[*task_.columns.weight].numbers = numbers_.back().data();
  }
  for (std::size_t i = 0; i < kept_.size(); ++i) {
    kept_[i].resize(n_rows);
    sinks_[task_.columns.keep[i]].cells = kept_[i].data();
  }
}

/// Codes of the block's own texts become those of the model.
void BlockScorer::code_levels(const table::BlockReading& reading, std::size_t n_rows) {
  for (std::size_t t = 0; t < codes_.size(); ++t) {
    const std::size_t column = task_.columns.of_term[t];
    if (sinks_[column].read_as != table::ReadAs::text) continue;
    std::vector<double> code_of;
    for (const auto& level : reading.columns[column].texts.levels()) {
      const auto code = forms::level_code(task_.scorer.model().terms[t].form, level.text);
      code_of.push_back(code ? static_cast<double>(*code) : model::kUnknownLevel);
    }
    for (std::size_t i = 0; i < n_rows; ++i)
      numbers_[t][i] =
          codes_[t][i] == table::kMissingLevel ? std::numeric_limits<double>::quiet_NaN() : code_of[codes_[t][i]];
  }
}

Status BlockScorer::run(const table::RowBlock& block) {
  text_.clear();
  counts_ = {};
  prepare_sinks(block.n_rows);
  const Result<table::BlockReading> reading = task_.stream.read(block, sinks_);
  if (!reading) return reading.error();
  code_levels(*reading, block.n_rows);
  if (task_.columns.weight)
    for (double& weight : numbers_.back())
      if (std::isnan(weight)) weight = 1.0;
  for (std::size_t first = 0; first < block.n_rows; first += kBatchRows)
    score_batch(first, std::min(kBatchRows, block.n_rows - first));
  counts_.rows = block.n_rows;
  return {};
}

void BlockScorer::score_batch(std::size_t first, std::size_t n) {
  std::vector<std::span<const double>> values;
  for (std::size_t t = 0; t < codes_.size(); ++t) values.emplace_back(numbers_[t].data() + first, n);
  std::span<const double> weights;
  if (task_.columns.weight) weights = {numbers_.back().data() + first, n};
  task_.scorer.score(values, weights, n, work_, scores_);
  for (std::size_t i = 0; i < n; ++i) write_row(first + i, i);
}

void BlockScorer::write_row(std::size_t row, std::size_t in_batch) {
  const std::uint8_t flags = scores_.flags[in_batch];
  counts_.scored += std::isnan(scores_.median[in_batch]) ? 0 : 1;
  counts_.flagged += flags != 0 ? 1 : 0;
  for (std::size_t bit = 0; flags >> bit != 0; ++bit) counts_.by_flag[bit] += (flags >> bit) & 1U;
  if (task_.json) text_ += '{';
  write_kept(row);
  if (task_.json) {
    write_json_values(in_batch);
    text_ += flags == 0 ? "" : "\"" + flag_list(row, in_batch, "\",\"") + "\"";
    text_ += "]}\n";
    return;
  }
  write_csv_values(in_batch);
  if (flags != 0) report::append_cell(text_, flag_list(row, in_batch, "; "));
  text_ += '\n';
}

void BlockScorer::write_kept(std::size_t row) {
  for (std::size_t i = 0; i < kept_.size(); ++i) {
    const std::string_view raw = kept_[i][row];
    const bool has_quotes = raw.find('"') != raw.npos;
    const table::CellText cell =
        table::cell_text({raw, raw.data() + raw.size(), has_quotes}, task_.stream.syntax(), scratch_);
    if (task_.json) {
      text_ += task_.names[i] + ":";
      report::append_json_string(text_, cell.text);
    } else {
      report::append_cell(text_, cell.text);
    }
    text_ += ',';
  }
}

void BlockScorer::write_csv_values(std::size_t in_batch) {
  std::array<char, kValueNames.size() * (report::kValueBytes + 1)> line;
  char* at = line.data();
  for (const auto* values : values_of(scores_)) {
    if (std::isfinite((*values)[in_batch])) at = report::write_value(at, (*values)[in_batch]);
    *at++ = ',';
  }
  text_.append(line.data(), static_cast<std::size_t>(at - line.data()));
}

void BlockScorer::write_json_values(std::size_t in_batch) {
  std::array<char, report::kValueBytes> number;
  std::size_t i = 0;
  for (const auto* values : values_of(scores_)) {
    const double value = (*values)[in_batch];
    text_ += std::string("\"") + kValueNames[i++] + "\":";
    if (std::isfinite(value))
      text_.append(number.data(), static_cast<std::size_t>(report::write_value(number.data(), value) - number.data()));
    else
      text_ += "null";
    text_ += ',';
  }
  text_ += "\"flags\":[";
}

/// "missing rain", "outside floor_area", "leverage": what is wrong with a row, term by term and then as a whole.
std::string BlockScorer::flag_list(std::size_t row, std::size_t in_batch, std::string_view between) const {
  const std::uint8_t flags = scores_.flags[in_batch];
  std::string list;
  const auto add = [&](const std::string& flag) {
    if (!list.empty()) list += between;
    if (!task_.json) {
      list += flag;
      return;
    }
    std::string quoted;
    report::append_json_string(quoted, flag);
    list.append(quoted, 1, quoted.size() - 2);
  };
  std::uint8_t of_terms = 0;
  const auto& terms = task_.scorer.model().terms;
  for (std::size_t t = 0; t < terms.size(); ++t) {
    const std::uint8_t of_term = task_.scorer.flags_of(t, numbers_[t][row]);
    of_terms |= of_term;
    for (std::size_t bit = 0; of_term >> bit != 0; ++bit)
      if (((of_term >> bit) & 1U) != 0) add(std::string(model::flag_name(bit)) + " " + terms[t].column);
  }
  if (task_.columns.weight && !(numbers_.back()[row] > 0.0)) {
    of_terms |= model::kUndefined;
    add(std::string(model::flag_name(2)) + " " + task_.weight_column);
  }
  const unsigned rest = flags & ~static_cast<unsigned>(of_terms);
  for (std::size_t bit = 0; rest >> bit != 0; ++bit)
    if (((rest >> bit) & 1U) != 0) add(model::flag_name(bit));
  return list;
}

}  // namespace formsieve::pipeline

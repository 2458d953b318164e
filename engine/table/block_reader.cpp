#include "table/block_reader.hpp"

#include "table/number.hpp"

#include <algorithm>
#include <limits>

namespace formsieve::table {

namespace {

class BlockReader {
 public:
  BlockReader(const ReadingTask& task, const Block& block)
      : task_(task),
        syntax_(task.source.syntax),
        text_(task.source.bytes.data()),
        end_(text_ + block.end),
        separator_(syntax_.separator()),
        decimal_(syntax_.decimal()),
        scan_numbers_(separator_ != decimal_),
        short_end_(scan_numbers_ && !task.missing.has_numbers() && end_ - text_ > kShortDecimalBytes
                       ? end_ - kShortDecimalBytes
                       : text_) {
    reading_.columns.resize(task.sinks.size());
  }

  BlockReading read(const Block& block) {
    line_ = block.first_line;
    row_ = block.first_row;
    for (const char* p = text_ + block.begin; p != end_; ++row_, ++line_) {
      if (task_.line_of_row != nullptr) task_.line_of_row[row_] = line_;
      p = read_row(p);
    }
    return std::move(reading_);
  }

 private:
  bool ends_row(const char* stop) const noexcept { return stop == end_ || *stop == '\n'; }

  /// Reads the row at `p`; returns the start of the next.
  const char* read_row(const char* p) {
    row_begin_ = p;
    const std::size_t last = task_.sinks.size() - 1;
    for (std::size_t column = 0; column < last; ++column) {
      const char* stop = read_short_number(p, column, separator_);
      if (stop == nullptr) stop = read_cell(p, column);
      if (ends_row(stop)) {
        finish_short_row(column + 1, stop);
        return stop == end_ ? end_ : stop + 1;
      }
      p = stop + 1;
    }
    const char* stop = read_short_number(p, last, '\n');
    if (stop == nullptr) stop = read_cell(p, last);
    if (ends_row(stop)) return stop == end_ ? end_ : stop + 1;
    return finish_long_row(stop + 1);
  }

  /// The shortest way for the commonest cell: a plain decimal number right up to what must follow it. Returns null when
  /// the cell is anything else.
  const char* read_short_number(const char* p, std::size_t column, char follower) {
    const ColumnSink& sink = task_.sinks[column];
    if (sink.numbers == nullptr || p >= short_end_) return nullptr;
    double value = 0.0;
    const char* const after = scan_short_decimal(p, decimal_, value);
    if (after == nullptr || *after != follower) return nullptr;
    sink.numbers[row_] = value;
    if (sink.cells != nullptr) sink.cells[row_] = {p, static_cast<std::size_t>(after - p)};
    return after;
  }

  /// Reads one cell; returns the separator, line feed or end behind it.
  const char* read_cell(const char* p, std::size_t column) {
    const ColumnSink& sink = task_.sinks[column];
    if (sink.read_as == ReadAs::number && scan_numbers_) {
      while (p != end_ && syntax_.is_blank(*p)) ++p;
      double value = 0.0;
      const char* const after = scan_number(p, end_, decimal_, value);
      const char* const stop = after == nullptr ? nullptr : end_of_number_cell(after);
      if (stop != nullptr && !(task_.missing.has_numbers() && is_marker(p, after))) {
        sink.numbers[row_] = value;
        if (sink.cells != nullptr) sink.cells[row_] = {p, static_cast<std::size_t>(after - p)};
        return stop;
      }
    }
    return read_any_cell(p, column);
  }

  /// The separator, line feed or end that follows a number, past blanks; null when something else does.
  const char* end_of_number_cell(const char* p) const noexcept {
    while (p != end_ && syntax_.is_blank(*p)) ++p;
    if (p == end_ || *p == separator_ || *p == '\n') return p;
    if (*p == '\r' && (p + 1 == end_ || p[1] == '\n')) return p + 1;
    return nullptr;
  }

  bool is_marker(const char* begin, const char* end) const noexcept {
    return task_.missing.contains({begin, static_cast<std::size_t>(end - begin)});
  }

  const char* read_any_cell(const char* p, std::size_t column) {
    const RawCell cell = scan_cell(p, end_, syntax_);
    if (cell.has_quotes) line_ += static_cast<std::uint64_t>(std::count(cell.raw.begin(), cell.raw.end(), '\n'));
    const ColumnSink& sink = task_.sinks[column];
    if (sink.read_as == ReadAs::nothing) return cell.stop;
    const CellText content = cell_text(cell, syntax_, scratch_);
    if (content.fault != CellFault::none) {
      note(fault_kind(content.fault), p + content.fault_at);
      store_missing(column);
      return cell.stop;
    }
    if (sink.read_as != ReadAs::written) store(column, content);
    if (sink.cells != nullptr) sink.cells[row_] = cell.raw;
    return cell.stop;
  }

  void store(std::size_t column, const CellText& content) {
    const ColumnSink& sink = task_.sinks[column];
    const std::string_view trimmed = syntax_.trim(content.text);
    if (task_.missing.contains(trimmed)) {
      store_missing(column);
      return;
    }
    LevelIndex& texts = reading_.columns[column].texts;
    if (sink.read_as == ReadAs::text) {
      sink.codes[row_] = texts.add(content.text, content.in_file, row_);
      return;
    }
    const std::optional<double> number = parse_number(trimmed, decimal_);
    sink.numbers[row_] = number.value_or(std::numeric_limits<double>::quiet_NaN());
    if (!number) texts.add(content.text, content.in_file, row_);
  }

  void store_missing(std::size_t column) {
    const ColumnSink& sink = task_.sinks[column];
    if (sink.read_as == ReadAs::number) sink.numbers[row_] = std::numeric_limits<double>::quiet_NaN();
    if (sink.read_as == ReadAs::text) sink.codes[row_] = kMissingLevel;
    if (sink.cells != nullptr) sink.cells[row_] = {};
    ++reading_.columns[column].n_missing;
  }

  void finish_short_row(std::size_t n_cells, const char* stop) {
    for (std::size_t column = n_cells; column < task_.sinks.size(); ++column) store_missing(column);
    const std::string_view row(row_begin_, static_cast<std::size_t>(stop - row_begin_));
    const bool is_empty = n_cells == 1 && row.find_first_not_of(" \t\r") == row.npos;
    note(is_empty ? FaultKind::empty_line : FaultKind::ragged_row, row_begin_, n_cells);
  }

  const char* finish_long_row(const char* p) {
    std::size_t n_cells = task_.sinks.size();
    for (;;) {
      ++n_cells;
      const RawCell cell = scan_cell(p, end_, syntax_);
      if (cell.has_quotes) line_ += static_cast<std::uint64_t>(std::count(cell.raw.begin(), cell.raw.end(), '\n'));
      const CellText content = cell_text(cell, syntax_, scratch_);
      if (content.fault != CellFault::none) note(fault_kind(content.fault), p + content.fault_at);
      if (ends_row(cell.stop)) {
        note(FaultKind::ragged_row, row_begin_, n_cells);
        return cell.stop == end_ ? end_ : cell.stop + 1;
      }
      p = cell.stop + 1;
    }
  }

  void note(FaultKind kind, const char* at, std::size_t n_cells = 0) {
    keep_earliest(reading_.fault,
                  {kind, static_cast<std::size_t>(row_begin_ - text_), static_cast<std::size_t>(at - text_), n_cells});
  }

  const ReadingTask& task_;
  const Syntax& syntax_;
  const char* text_;
  const char* end_;
  char separator_;
  char decimal_;
  bool scan_numbers_;      ///< false where an unquoted number could run past its separator
  const char* short_end_;  ///< cells that start before it may be read as short numbers
  BlockReading reading_;
  const char* row_begin_ = nullptr;
  std::size_t row_ = 0;
  std::uint64_t line_ = 1;
  std::string scratch_;
};

}  // namespace

BlockReading read_block(const ReadingTask& task, const Block& block) { return BlockReader(task, block).read(block); }

}  // namespace formsieve::table

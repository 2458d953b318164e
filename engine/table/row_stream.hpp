// A delimited text too large for memory, read as a stream of blocks of whole rows. Cells are cut and read by the same
// code as in read_csv.
#pragma once

#include "table/block_reader.hpp"
#include "table/census.hpp"

#include <formsieve/base.hpp>
#include <formsieve/table.hpp>

#include <cstddef>
#include <cstdint>
#include <memory>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

namespace formsieve::table {

/// A longer row is taken for what it nearly always is: a quote that is never closed.
inline constexpr std::size_t kLongestRow = std::size_t{64} << 20;

/// What the dialect is judged by, whatever the size of a block: as much as read_csv samples.
inline constexpr std::size_t kDialectBytes = std::size_t{1} << 20;

/// Whole rows of the body.
struct RowBlock {
  std::vector<char> bytes;
  std::size_t n_rows = 0;
  std::size_t first_row = 0;       ///< index of the first row, from 0 after the header
  std::uint64_t first_line = 1;    ///< its line in the file
  std::uint64_t bytes_before = 0;  ///< bytes of the file before the block
  std::optional<ByteFault> fault;  ///< earliest NUL byte or invalid UTF-8

  std::string_view view() const noexcept { return {bytes.data(), bytes.size()}; }
};

/// Reads the bytes of one text in order. Where read_csv looks at the whole file (for the decimal mark, when its first
/// rows do not show it), a stream can look at what its first block holds: beyond that, a cell that may have a decimal
/// or a thousands mark is an error that asks which it is.
class RowStream {
 public:
  /// `name` stands in messages; `block_bytes` is what a block holds at least, so that rows are cut by bytes and no
  /// result depends on threads. Both the options and the reader must outlive the stream.
  RowStream(ByteReader reader, std::string name, const CsvOptions& options, std::size_t block_bytes);

  /// Reads the first block, settles the dialect and reads the header. Errors: those of read_csv about options, format
  /// and header, and those of the reader.
  Status open();

  const std::vector<std::string>& header() const noexcept { return source_.header; }
  const Syntax& syntax() const noexcept { return source_.syntax; }

  /// The next block of at least one row; unset at the end. Errors (kind data): no rows at all, a row beyond
  /// kLongestRow; those of the reader.
  Result<std::optional<RowBlock>> next();

  /// Reads the cells of a block into `sinks` (one for each column of the header, each with room for its rows); may be
  /// called from several threads. Text codes are those of the returned texts. The earliest fault of the block, whatever
  /// its kind, is the error: bytes, quotes, row width, a cell of a column of numbers that is none (with its file, line
  /// and column), one whose mark may be a decimal or a thousands mark.
  Result<BlockReading> read(const RowBlock& block, std::span<const ColumnSink> sinks) const;

 private:
  Status fill(std::size_t wanted);
  Status settle_dialect();
  Result<std::size_t> find_cut();
  RowBlock cut_block(std::size_t end);
  std::optional<Error> open_mark_error(const Source& source, std::span<const ColumnSink> sinks, RowStart body) const;

  ByteReader reader_;
  const CsvOptions& options_;
  std::size_t block_bytes_;
  Source source_;  ///< without bytes
  MissingMarkers missing_;
  std::vector<char> buffer_;  ///< read and not yet handed out
  bool at_end_ = false;       ///< the reader has nothing more
  bool decimal_is_open_ = false;
  std::size_t next_row_ = 0;
  std::uint64_t next_line_ = 1, next_byte_ = 0;
};

}  // namespace formsieve::table

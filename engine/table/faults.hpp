// Faults of a delimited text file: which comes first, where it is, and what to say about it.
#pragma once

#include "table/cells.hpp"

#include <formsieve/base.hpp>

#include <cstddef>
#include <cstdint>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

namespace formsieve::table {

enum class FaultKind {
  nul_byte,
  invalid_utf8,
  lone_carriage_return,
  quote_in_cell,
  text_after_quote,
  unclosed_quote,
  empty_line,
  ragged_row,
};

/// Something that no table may contain, found at a byte of the file.
struct Fault {
  FaultKind kind;
  std::size_t row_begin;    ///< first byte of the row that holds it
  std::size_t offset;       ///< the byte itself; of a row's own fault, its first byte
  std::size_t n_cells = 0;  ///< of a ragged row
};

/// The order in which faults are reported: by row; within a row the faults of its bytes and quotes by position, then
/// those of its width, which they may have caused.
bool is_earlier(const Fault& a, const Fault& b) noexcept;

/// Keeps the earlier of two.
void keep_earliest(std::optional<Fault>& earliest, const Fault& fault) noexcept;

FaultKind fault_kind(CellFault fault) noexcept;

/// What a message about a file needs to know of it.
struct Source {
  std::string name;        ///< as the caller named it
  std::string_view bytes;  ///< the whole file, or a stretch of it that starts with a row
  Syntax syntax;
  bool separator_given = false;     ///< by the caller, rather than found out
  std::vector<std::string> header;  ///< empty until it has been read
  std::uint64_t bytes_before = 0;   ///< bytes of the file that come before `bytes`
};

/// A place from which lines can be counted: the first byte of a row, and its line.
struct RowStart {
  std::size_t offset = 0;
  std::uint64_t line = 1;
};

/// Where a byte lies.
struct Position {
  RowStart row;            ///< of the row that holds it
  std::uint64_t line = 1;  ///< of the byte itself, which differs within quoted cells
  std::size_t column = 0;  ///< index of the cell that holds it
};

/// Finds a byte by walking rows from `from`, which must not lie behind it. Cost: O(bytes between).
Position locate(const Source& source, RowStart from, std::size_t offset);

/// "coldstores.csv, line 7, column 'fill'"; columns without a name are numbered from 1.
std::string describe_place(const Source& source, std::uint64_t line, std::size_t column);

/// The error that tells of a fault.
Error describe_fault(const Source& source, const Fault& fault, const Position& position);

}  // namespace formsieve::table

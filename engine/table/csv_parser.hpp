// The reader of delimited text, on bytes in memory.
#pragma once

#include "table/blocks.hpp"

#include <formsieve/base.hpp>
#include <formsieve/table.hpp>

#include <cstddef>
#include <string>
#include <string_view>

namespace formsieve::table {

/// What read_csv does once the file is in memory; `source` names it in the table and in errors. The block size is an
/// argument so that tests can cut small texts everywhere; the table does not depend on it.
Result<Table> parse_csv(std::string_view bytes, const std::string& source, const CsvOptions& options,
                        std::size_t block_bytes = kBlockBytes);

}  // namespace formsieve::table

// The bytes of a file, read once into memory.
#pragma once

#include "table/large_pages.hpp"

#include <formsieve/base.hpp>

#include <cstddef>
#include <memory>
#include <string>
#include <string_view>

namespace formsieve::table {

/// A whole file in memory; moved, never copied.
class FileBytes {
 public:
  FileBytes() = default;
  explicit FileBytes(std::size_t size) : data_(std::make_unique_for_overwrite<char[]>(size)), size_(size) {
    prefer_large_pages(data_.get(), size);
  }

  char* data() noexcept { return data_.get(); }
  std::string_view view() const noexcept { return {data_.get(), size_}; }

 private:
  std::unique_ptr<char[]> data_;
  std::size_t size_ = 0;
};

/// Checks that `path` names an ordinary file that can be opened. Errors (kind io): not found, a folder, not an ordinary
/// file (a pipe, device or socket, which a resumed run could not read again), no permission.
Status check_file(const std::string& path);

/// Reads an ordinary file in one go, in parallel pieces. Memory: the size of the file. Errors (kind io): those of
/// check_file, a failed read, a file that changed its size meanwhile. A copy in memory rather than a mapping, since a
/// mapped file that another program shortens would end the process.
Result<FileBytes> read_file(const std::string& path, unsigned threads);

}  // namespace formsieve::table

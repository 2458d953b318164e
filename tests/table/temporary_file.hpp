// A file that lasts as long as a test.
#pragma once

#include <filesystem>
#include <fstream>
#include <stdexcept>
#include <string>
#include <string_view>

#include <unistd.h>

namespace formsieve::table::test {

class TemporaryFile {
 public:
  explicit TemporaryFile(std::string_view content = {}) {
    path_ = (std::filesystem::temp_directory_path() / "formsieve-table-XXXXXX").string();
    const int descriptor = ::mkstemp(path_.data());
    if (descriptor < 0) throw std::runtime_error("no temporary file can be made");
    ::close(descriptor);
    std::ofstream(path_, std::ios::binary) << content;
  }
  TemporaryFile(const TemporaryFile&) = delete;
  TemporaryFile& operator=(const TemporaryFile&) = delete;
  ~TemporaryFile() {
    std::error_code ignored;
    std::filesystem::remove(path_, ignored);
  }

  const std::string& path() const noexcept { return path_; }

 private:
  std::string path_;
};

}  // namespace formsieve::table::test

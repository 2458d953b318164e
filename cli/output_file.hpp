// A file that is to be written: made sure of before the work starts, and in place only when it is complete.
#pragma once

#include <formsieve/base.hpp>

#include <string>
#include <string_view>

namespace formsieve::cli {

class OutputFile {
 public:
  OutputFile() = default;

  /// Opens a file beside `path` under a temporary name. Errors: usage when `path` exists and may not be replaced, io
  /// when nothing can be written there.
  static Result<OutputFile> open(const std::string& path, bool replace);

  OutputFile(OutputFile&& other) noexcept;
  OutputFile& operator=(OutputFile&& other) noexcept;
  ~OutputFile();  ///< an unfinished file is removed

  /// Writes a piece of the content. Errors: io.
  Status write(std::string_view piece);
  /// Writes the rest of the content and gives the file its name. Errors: io.
  Status finish(std::string_view content);

 private:
  void discard();

  int descriptor_ = -1;
  std::string path_, temporary_;
};

}  // namespace formsieve::cli

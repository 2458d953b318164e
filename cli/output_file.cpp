#include "output_file.hpp"

#include "output.hpp"

#include <cerrno>
#include <filesystem>
#include <system_error>
#include <utility>

#include <fcntl.h>
#include <unistd.h>

namespace formsieve::cli {
namespace {

Error cannot_write(const std::string& path, int failure) {
  return {ErrorKind::io, "the file cannot be written: " + std::generic_category().message(failure), path,
          "name a file in a folder that exists and may be written to"};
}

}  // namespace

Result<OutputFile> OutputFile::open(const std::string& path, bool replace) {
  std::error_code failure;
  if (std::filesystem::is_directory(path, failure)) return cannot_write(path, EISDIR);
  if (!replace && std::filesystem::exists(path, failure)) {
    return Error{ErrorKind::usage, "the file exists already", path, "add --replace to overwrite it, or name another"};
  }
  OutputFile file;
  file.path_ = path;
  file.temporary_ = path + ".part";
  constexpr mode_t kReadable = 0666;  // less what the user's mask takes away
  file.descriptor_ = ::open(file.temporary_.c_str(), O_WRONLY | O_CREAT | O_TRUNC | O_CLOEXEC, kReadable);
  if (file.descriptor_ < 0) return cannot_write(path, errno);
  return file;
}

OutputFile::OutputFile(OutputFile&& other) noexcept
    : descriptor_(std::exchange(other.descriptor_, -1)),
      path_(std::move(other.path_)),
      temporary_(std::move(other.temporary_)) {}

OutputFile& OutputFile::operator=(OutputFile&& other) noexcept {
  if (this == &other) return *this;
  discard();
  descriptor_ = std::exchange(other.descriptor_, -1);
  path_ = std::move(other.path_);
  temporary_ = std::move(other.temporary_);
  return *this;
}

OutputFile::~OutputFile() { discard(); }

void OutputFile::discard() {
  if (descriptor_ < 0) return;
  close(descriptor_);
  descriptor_ = -1;
  unlink(temporary_.c_str());
}

Status OutputFile::write(std::string_view piece) {
  if (const int failure = write_all(descriptor_, piece); failure != 0) return cannot_write(path_, failure);
  return {};
}

Status OutputFile::finish(std::string_view content) {
  if (Status status = write(content); !status) return status;
  const int closed = close(std::exchange(descriptor_, -1));
  if (closed == 0 && rename(temporary_.c_str(), path_.c_str()) == 0) return {};
  const int failure = errno;
  unlink(temporary_.c_str());
  return cannot_write(path_, failure);
}

}  // namespace formsieve::cli

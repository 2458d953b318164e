#include "run/file_io.hpp"

#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>

#include <algorithm>
#include <cerrno>
#include <cstring>
#include <filesystem>
#include <system_error>

namespace formsieve::run {

namespace {

constexpr std::size_t kBlockBytes = 1u << 16;

/// A file descriptor that closes itself.
class Descriptor {
 public:
  explicit Descriptor(int fd) : fd_(fd) {}
  ~Descriptor() { close(); }
  Descriptor(const Descriptor&) = delete;
  Descriptor& operator=(const Descriptor&) = delete;
  int get() const { return fd_; }
  bool open() const { return fd_ >= 0; }
  bool close() {
    const bool good = fd_ < 0 || ::close(fd_) == 0;
    fd_ = -1;
    return good;
  }

 private:
  int fd_;
};

std::string reason(int code) { return std::system_category().message(code); }

std::string hint_for(int code) {
  if (code == ENOSPC || code == EDQUOT) return "free some space on the disk, or choose a folder elsewhere";
  if (code == EACCES || code == EPERM) return "ask for permission, or choose another place";
  if (code == EROFS) return "this disk is read-only: choose another place";
  if (code == ENOENT) return "check the path; it is taken from the working folder unless it begins with /";
  return {};
}

Error io_error(const std::string& what, const std::string& path, int code) {
  return {ErrorKind::io, what + ": " + reason(code), path, hint_for(code)};
}

bool write_all(int fd, std::string_view text) {
  while (!text.empty()) {
    const ssize_t written = ::write(fd, text.data(), text.size());
    if (written < 0 && errno == EINTR) continue;
    if (written < 0) return false;
    text.remove_prefix(static_cast<std::size_t>(written));
  }
  return true;
}

/// A rename is on the disk only once its folder is. Some file systems cannot sync a folder: that is no failure.
void sync_folder_of(const std::string& path) {
  const std::string folder = std::filesystem::path(path).parent_path().string();
  const Descriptor fd(::open(folder.empty() ? "." : folder.c_str(), O_RDONLY | O_DIRECTORY | O_CLOEXEC));
  if (fd.open()) ::fsync(fd.get());
}

}  // namespace

Result<std::string> read_file(const std::string& path, std::size_t largest_bytes) {
  const Descriptor fd(::open(path.c_str(), O_RDONLY | O_CLOEXEC));
  if (!fd.open()) return io_error("cannot open the file", path, errno);
  std::string text;
  while (true) {
    const std::size_t filled = text.size();
    text.resize(filled + kBlockBytes);
    const ssize_t got = ::read(fd.get(), text.data() + filled, kBlockBytes);
    const int code = errno;
    text.resize(filled + static_cast<std::size_t>(std::max<ssize_t>(got, 0)));
    if (got < 0 && code == EINTR) continue;
    if (got < 0) return io_error("cannot read the file", path, code);
    if (got == 0) return text;
    if (text.size() > largest_bytes)
      return Error{ErrorKind::io, "the file is longer than " + std::to_string(largest_bytes) + " bytes", path,
                   "check that this is the file you meant"};
  }
}

Status write_file(const std::string& path, std::string_view text) {
  const std::string part = path + ".part";
  Descriptor fd(::open(part.c_str(), O_WRONLY | O_CREAT | O_TRUNC | O_CLOEXEC, 0666));
  if (!fd.open()) return io_error("cannot write the file", path, errno);
  const bool written = write_all(fd.get(), text) && ::fsync(fd.get()) == 0 && fd.close();
  if (!written || ::rename(part.c_str(), path.c_str()) != 0) {
    const int code = errno;
    ::unlink(part.c_str());
    return io_error("cannot write the file", path, code);
  }
  sync_folder_of(path);
  return {};
}

}  // namespace formsieve::run

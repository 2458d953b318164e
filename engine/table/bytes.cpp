#include "table/bytes.hpp"

#include <formsieve/table.hpp>

#include "base/parallel.hpp"

#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>

#include <algorithm>
#include <atomic>
#include <cerrno>
#include <cstring>
#include <memory>
#include <span>

namespace formsieve::table {

namespace {

/// Bytes that one read asks for: large enough that the system call costs nothing beside the copy.
constexpr std::size_t kReadBytes = std::size_t{4} << 20;

/// An open file descriptor that closes itself.
class Descriptor {
 public:
  explicit Descriptor(int number) : number_(number) {}
  Descriptor(const Descriptor&) = delete;
  Descriptor& operator=(const Descriptor&) = delete;
  ~Descriptor() {
    if (number_ >= 0) ::close(number_);
  }
  int number() const noexcept { return number_; }

 private:
  int number_;
};

Error io_error(const std::string& path, std::string message, std::string hint) {
  return {ErrorKind::io, std::move(message), path, std::move(hint)};
}

Error open_error(const std::string& path, int code) {
  switch (code) {
    case ENOENT:
    case ENOTDIR:
      return io_error(path, "there is no file '" + path + "'", "Check the spelling of the name and its folder");
    case EACCES:
    case EPERM:
      return io_error(path, "the file may not be read (permission denied)",
                      "Ask for the right to read it, or copy it to a folder of your own");
    default:
      return io_error(path, std::string("the file cannot be opened: ") + std::strerror(code),
                      "Check the name and that the disk it is on can be reached");
  }
}

/// Size of the open file, or why it is not one that can be read as a table.
Result<std::size_t> size_of_ordinary_file(const std::string& path, const Descriptor& file) {
  struct stat status = {};
  if (::fstat(file.number(), &status) != 0) return open_error(path, errno);
  if (S_ISDIR(status.st_mode)) return io_error(path, "this is a folder, not a file", "Name a file inside the folder");
  if (!S_ISREG(status.st_mode))
    return io_error(path, "this is not an ordinary file (it is a pipe, a device or a socket)",
                    "Save the table to a file first: a run notes the file's fingerprint and may have to read it again");
  return static_cast<std::size_t>(status.st_size);
}

// Without O_NONBLOCK, opening a pipe that nobody writes to would wait for ever.
Descriptor open_for_reading(const std::string& path) {
  return Descriptor(::open(path.c_str(), O_RDONLY | O_CLOEXEC | O_NONBLOCK));
}

/// Reads [offset, offset + size) of the file; 0, or the error number (ENODATA: the file ended early).
int read_piece(const Descriptor& file, char* to, std::size_t offset, std::size_t size) {
  while (size > 0) {
    const ssize_t got = ::pread(file.number(), to, size, static_cast<off_t>(offset));
    if (got < 0 && errno == EINTR) continue;
    if (got < 0) return errno;
    if (got == 0) return ENODATA;
    to += got;
    offset += static_cast<std::size_t>(got);
    size -= static_cast<std::size_t>(got);
  }
  return 0;
}

}  // namespace

Status check_file(const std::string& path) {
  const Descriptor file = open_for_reading(path);
  if (file.number() < 0) return open_error(path, errno);
  const Result<std::size_t> size = size_of_ordinary_file(path, file);
  if (!size) return size.error();
  return {};
}

Result<FileBytes> read_file(const std::string& path, unsigned threads) {
  const Descriptor file = open_for_reading(path);
  if (file.number() < 0) return open_error(path, errno);
  const Result<std::size_t> size = size_of_ordinary_file(path, file);
  if (!size) return size.error();

  FileBytes bytes(*size);
  std::atomic<int> failure = 0;
  base::parallel_for((*size + kReadBytes - 1) / kReadBytes, threads, [&](std::size_t piece) {
    const std::size_t begin = piece * kReadBytes;
    const int code = read_piece(file, bytes.data() + begin, begin, std::min(kReadBytes, *size - begin));
    if (code != 0) failure = code;
  });
  const Result<std::size_t> size_after = size_of_ordinary_file(path, file);
  if (failure == ENODATA || (size_after.ok() && *size_after != *size))
    return io_error(path, "the file changed while it was being read", "Wait until it has been written, then try again");
  if (failure != 0)
    return io_error(path, std::string("the file cannot be read: ") + std::strerror(failure),
                    "Check the disk or network folder that holds it");
  return bytes;
}

namespace {

Result<std::size_t> read_some(const std::string& name, int descriptor, std::span<char> into) {
  for (;;) {
    const ssize_t n = ::read(descriptor, into.data(), into.size());
    if (n >= 0) return static_cast<std::size_t>(n);
    if (errno != EINTR)
      return io_error(name, std::string("the file cannot be read: ") + std::strerror(errno),
                      "Check the disk, network folder or program that it comes from");
  }
}

}  // namespace

Result<ByteStream> open_stream(const std::string& path) {
  if (path == "-")
    return ByteStream{[](std::span<char> into) { return read_some("standard input", STDIN_FILENO, into); }, 0};
  const auto file = std::make_shared<Descriptor>(::open(path.c_str(), O_RDONLY | O_CLOEXEC));
  if (file->number() < 0) return open_error(path, errno);
  struct stat status = {};
  if (::fstat(file->number(), &status) != 0) return open_error(path, errno);
  if (S_ISDIR(status.st_mode)) return io_error(path, "this is a folder, not a file", "Name a file inside the folder");
  const std::uint64_t size = S_ISREG(status.st_mode) ? static_cast<std::uint64_t>(status.st_size) : 0;
  return ByteStream{[path, file](std::span<char> into) { return read_some(path, file->number(), into); }, size};
}

}  // namespace formsieve::table

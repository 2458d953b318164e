#include "output.hpp"

#include <cerrno>
#include <csignal>

#include <fcntl.h>
#include <poll.h>
#include <unistd.h>

namespace formsieve::cli {

int write_all(int descriptor, std::string_view text) {
  while (!text.empty()) {
    const ssize_t written = write(descriptor, text.data(), text.size());
    if (written >= 0) {
      text.remove_prefix(static_cast<std::size_t>(written));
    } else if (errno == EAGAIN || errno == EWOULDBLOCK) {
      pollfd ready{descriptor, POLLOUT, 0};  // somebody shares the stream and has made it non-blocking
      (void)poll(&ready, 1, -1);
    } else if (errno != EINTR) {
      return errno;
    }
  }
  return 0;
}

void guard_standard_streams() {
  for (int descriptor = 0; descriptor <= 2; ++descriptor) {
    if (fcntl(descriptor, F_GETFD) != -1 || errno != EBADF) continue;
    // The lowest free descriptor is this one. Reading from 0 and writing to 1 or 2 shall fail.
    (void)open("/dev/null", descriptor == 0 ? O_WRONLY : O_RDONLY);
  }
  (void)std::signal(SIGPIPE, SIG_IGN);
}

}  // namespace formsieve::cli

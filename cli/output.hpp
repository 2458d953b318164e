// Writing that notices: a reader that has gone, a device that is full, a stream that was closed before we started.
#pragma once

#include <string_view>

namespace formsieve::cli {

/// Writes everything, however many calls it takes. Returns 0 or the error number of the failed call.
int write_all(int descriptor, std::string_view text);

/// Makes sure that descriptors 0 to 2 are taken, so that no data file is ever opened as "standard output"; one that was
/// closed is opened such that writing to it fails. Also lets a write to a closed pipe return an error instead of
/// ending the program. Call first.
void guard_standard_streams();

}  // namespace formsieve::cli

// The public edge: no exception of a library crosses it.
#pragma once

#include <formsieve/base.hpp>

#include <exception>
#include <new>
#include <string>

namespace formsieve::pipeline {

/// Calls `step` and turns what it throws into an Error: lack of memory into one of kind data that says what to do,
/// anything else into a bug report.
template <class Step>
auto guarded(const std::string& file, Step step) -> decltype(step()) {
  try {
    return step();
  } catch (const std::bad_alloc&) {
    return Error{ErrorKind::data, "there is not enough memory for this table and these menus", file,
                 "use fewer forms or predictors, or a machine with more memory"};
  } catch (const std::exception& problem) {
    return Error{ErrorKind::internal, std::string("an unexpected failure: ") + problem.what(), file,
                 "this is a bug of formsieve; please report it with the command and, if you can, the table"};
  }
}

}  // namespace formsieve::pipeline

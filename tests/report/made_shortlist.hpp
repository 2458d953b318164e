// Shortlists at random with every field set, and a plain print-out of one that owes nothing to the JSON writer.
#pragma once

#include <formsieve/judge.hpp>

#include <cstdint>
#include <string>

namespace formsieve::test {

/// Text with all that is awkward in JSON and CSV; values among them 0, −0, the smallest, the largest and unset ones.
judge::Shortlist made_shortlist(std::uint64_t seed);

/// A small one that could come from a search, with round figures.
judge::Shortlist plain_shortlist();

/// Every field of it in one text, doubles to the bit; without space.seconds.
std::string print_out(const judge::Shortlist& shortlist);

}  // namespace formsieve::test

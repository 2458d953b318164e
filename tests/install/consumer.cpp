// What a program outside the project needs to run a search: the public headers and one library.
#include <formsieve/pipeline.hpp>

#include <cstdio>

int main(int argc, char** argv) {
  if (argc != 3) return 2;
  formsieve::run::Plan plan;
  plan.data.file = argv[1];
  plan.data.response = "volume";
  formsieve::pipeline::SearchOptions options;
  options.out = argv[2];
  const auto outcome = formsieve::pipeline::search(plan, options);
  if (!outcome) {
    std::fprintf(stderr, "%s\n", outcome.error().message.c_str());
    return 1;
  }
  for (const auto& candidate : outcome->shortlist.candidates) std::printf("%s\n", candidate.equation.c_str());
  return 0;
}

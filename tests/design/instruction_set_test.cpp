#include "design/cross_product_kernel.hpp"
#include "instruction_sets.hpp"

#include <set>
#include <string>
#include <vector>

using namespace formsieve;

TEST_CASE("base: a forced instruction set is the one in use, in the kernels too", "[base][unit]") {
  std::set<std::string> in_use;
  std::set<double> sums;
  test::for_each_instruction_set([&] {
    in_use.insert(base::instruction_set());
    // 1 + 2⁻³⁰ squared less 1 + 2⁻²⁹: only a fused sum keeps the 2⁻⁶⁰
    std::vector<double> panels(2 * design::kPanelColumns, 0.0);
    panels[0] = -(1.0 + 0x1p-29);
    panels[1] = 1.0;
    panels[design::kPanelColumns] = panels[design::kPanelColumns + 1] = 1.0 + 0x1p-30;
    std::vector<double> out(design::kPanelColumns * design::kPanelColumns);
    design::cross_products(panels.data(), 2, 2, out.data());
    CHECK(out[1] == (base::instruction_set() == "baseline" ? 0.0 : 0x1p-60));
  });
  CHECK(in_use.count("baseline") == 1);
}

TEST_CASE("base: an instruction set that is none is refused and changes nothing", "[base][unit]") {
  REQUIRE(base::force_instruction_set("baseline").ok());
  const auto status = base::force_instruction_set("sse9");
  REQUIRE_FALSE(status.ok());
  CHECK(status.error().kind == ErrorKind::usage);
  CHECK(status.error().message.find("'sse9'") != std::string::npos);
  CHECK(base::instruction_set() == "baseline");
  REQUIRE(base::force_instruction_set("best").ok());
}

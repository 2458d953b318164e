#include <formsieve/run.hpp>

#include <catch2/catch.hpp>

#include <string>
#include <vector>

using run_names = std::vector<std::string>;
using formsieve::run::nearest;

TEST_CASE("run: nearest name is found when one slip separates them", "[run][unit]") {
  const run_names keys{"strategy", "max_terms", "within", "folds", "repeats", "seed", "pool", "budget"};
  CHECK(nearest("fold", keys) == "folds");     // a letter left out
  CHECK(nearest("seeed", keys) == "seed");     // a letter too many
  CHECK(nearest("badget", keys) == "budget");  // a wrong letter
  CHECK(nearest("withni", keys) == "within");  // two letters exchanged
  CHECK(nearest("Pool", keys) == "pool");      // case
  CHECK(nearest("max-terms", keys) == "max_terms");
  CHECK(nearest("stratgy", keys) == "strategy");
}

TEST_CASE("run: nearest name is none when the word is another", "[run][unit]") {
  const run_names keys{"by", "shortlist", "near_tie", "require"};
  CHECK_FALSE(nearest("colour", keys));
  CHECK_FALSE(nearest("xy", run_names{"ab"}));
  CHECK_FALSE(nearest("a", run_names{"b"}));
  CHECK_FALSE(nearest("", keys));
  CHECK_FALSE(nearest("anything", {}));
}

TEST_CASE("run: nearest name is the closest, and the first of equals", "[run][unit]") {
  CHECK(nearest("floor_are", {"floor_ares", "floor_area", "floor_air"}) == "floor_ares");
  CHECK(nearest("sqrtt", {"sqr", "sqrt"}) == "sqrt");
  CHECK(nearest("ln", {"identity", "ln"}) == "ln");
}

TEST_CASE("run: nearest name counts characters, not bytes", "[run][unit]") {
  CHECK(nearest("flaeche_m2", {"fläche_m2"}) == "fläche_m2");
  CHECK(nearest("hohe", {"höhe"}) == "höhe");
  CHECK_FALSE(nearest("öö", {"ab"}));
  CHECK_FALSE(nearest("\xff\xfe", {"ab"}));
  CHECK_FALSE(nearest("\xe2\x82", {"abcdef"}));  // a sequence cut short
}

// The SIMD walk against the plain one, with every instruction set of the machine, on shapes that meet each of the
// kernel's paths; and its summary against plain sums.
#include "plain/walk.hpp"
#include "plain_summary.hpp"
#include "problem.hpp"
#include "search/walk.hpp"

#include <formsieve/base.hpp>

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <optional>

using namespace formsieve;
using search::Score;
using test::Problem;
using test::Shape;

namespace {

/// The sets that this processor has, and back to the best at the end.
class EveryInstructionSet {
 public:
  ~EveryInstructionSet() { (void)base::force_instruction_set("best"); }
  template <class Body>
  void each(const Body& body) const {
    std::size_t n_run = 0;
    for (const char* name : {"baseline", "avx2", "avx512"}) {
      if (!base::force_instruction_set(name)) continue;
      ++n_run;
      INFO("instruction set " << base::instruction_set());
      body();
    }
    CHECK(n_run > 0);
  }
};

double relative(double a, double b) { return a == b ? 0.0 : std::abs(a - b) / std::abs(b); }

std::vector<double> penalties(double per_column) {
  std::vector<double> penalty;
  for (int k = 0; k <= 100; ++k) penalty.push_back(per_column * k);
  return penalty;
}

search::WalkOptions lists_of(std::size_t keep) {
  search::WalkOptions options;
  options.rules = {{Score::cv_sse, keep, {}},
                   {Score::penalised_rss, keep, penalties(2.0)},
                   {Score::penalised_rss, keep / 2, penalties(6.0)}};
  options.threads = 1;
  return options;
}

std::vector<Shape> menus(std::vector<std::size_t> n_forms) {
  std::vector<Shape> shapes;
  for (const std::size_t n : n_forms) shapes.push_back({std::vector<std::size_t>(n, 1)});
  return shapes;
}

/// With `ties`, candidates that are equal but for rounding may change places.
void check_equal(const search::WalkResult& fast, const search::WalkResult& plain, bool ties = false) {
  CHECK(fast.n_scored == plain.n_scored);
  CHECK(fast.n_inseparable == plain.n_inseparable);
  double worst = 0.0;
  for (std::size_t rule = 0; rule < plain.lists.size(); ++rule) {
    for (std::size_t r = 0; r < plain.lists[rule].size(); ++r) {
      REQUIRE(fast.lists[rule][r].size() == plain.lists[rule][r].size());
      for (std::size_t i = 0; i < plain.lists[rule][r].size(); ++i) {
        const search::Scored& a = fast.lists[rule][r][i];
        const search::Scored& b = plain.lists[rule][r][i];
        if (!ties) CHECK(a.number == b.number);
        CHECK(a.n_columns == b.n_columns);
        worst = std::max({worst, relative(a.cv_sse, b.cv_sse), relative(a.rss, b.rss)});
      }
    }
  }
  CHECK(worst < 1e-11);
}

void check_shape(const std::vector<Shape>& shapes, std::size_t n_responses, std::optional<std::size_t> max_terms) {
  Problem problem = test::make_problem(61, 90, shapes, n_responses, 6);
  problem.space.max_terms = max_terms;
  const auto grams = test::grams_of(problem);
  const auto plain = plain::walk(problem.space, grams, lists_of(40));
  EveryInstructionSet().each([&] { check_equal(search::walk(problem.space, grams, lists_of(40)), plain); });
}

/// Largest relative error of the minima, and largest error of a share of weight.
struct Difference {
  double best = 0.0, share = 0.0;
};

void compare(const search::Standing& fast, const search::Standing& plain, double log_all, Difference& difference) {
  difference.best = std::max({difference.best, relative(fast.best_cv_sse, plain.best_cv_sse),
                              relative(fast.best_penalised_rss, plain.best_penalised_rss)});
  difference.share =
      std::max(difference.share, std::abs(std::exp(fast.log_weight - log_all) - std::exp(plain.log_weight - log_all)));
}

/// `tolerance` of the minima: 1e-11 where no cancellation eats digits.
void check_summary(const search::Summary& fast, const search::Summary& plain, double tolerance) {
  REQUIRE(fast.responses.size() == plain.responses.size());
  CHECK(fast.unit_sse == plain.unit_sse);
  for (std::size_t r = 0; r < plain.responses.size(); ++r) {
    const auto& a = fast.responses[r];
    const auto& b = plain.responses[r];
    Difference difference;
    const double log_all = b.all.log_weight;
    CHECK(std::abs(a.all.log_weight - log_all) < 2e-6);
    compare(a.all, b.all, log_all, difference);
    for (std::size_t j = 0; j < b.of_choice.size(); ++j)
      for (std::size_t c = 0; c < b.of_choice[j].size(); ++c)
        compare(a.of_choice[j][c], b.of_choice[j][c], log_all, difference);
    for (std::size_t k = 0; k < b.by_terms.size(); ++k) compare(a.by_terms[k], b.by_terms[k], log_all, difference);
    CHECK(difference.best < tolerance);
    CHECK(difference.share < 2.0 * search::Summary::kNegligibleWeight);
    CHECK(a.histogram == b.histogram);
  }
}

search::WalkOptions with_summary() {
  search::WalkOptions options = lists_of(10);
  options.summary_penalty = penalties(2.0);
  return options;
}

void check_summary_of(const Problem& problem, double tolerance = 1e-11) {
  const auto grams = test::grams_of(problem);
  const auto plain = test::plain_summary(problem.space, grams, penalties(2.0));
  EveryInstructionSet().each(
      [&] { check_summary(search::walk(problem.space, grams, with_summary()).summary, plain, tolerance); });
}

}  // namespace

TEST_CASE("search: the walk is the plain walk for one to six responses", "[search][property]") {
  for (const std::size_t n_responses : {1u, 2u, 3u, 4u, 6u}) check_shape(menus({6, 3, 4, 2, 3}), n_responses, {});
}

TEST_CASE("search: the walk is the plain walk for menus of every size", "[search][property]") {
  for (std::size_t n = 1; n <= 10; ++n) check_shape(menus({n, 10 - n + 1, 2, 3}), 2, {});
  check_shape(menus({17, 9, 4}), 1, {});
  check_shape(menus({3}), 2, {});
  check_shape(menus({5, 1}), 2, {});
}

TEST_CASE("search: the walk is the plain walk under every max_terms", "[search][property]") {
  for (std::size_t max_terms = 0; max_terms <= 7; ++max_terms) check_shape(menus({3, 2, 2, 3, 1, 2, 2}), 2, max_terms);
}

TEST_CASE("search: the walk is the plain walk where simple and wide forms mix", "[search][property]") {
  const std::vector<Shape> mixed = {{{1, 2, 1}}, {{1, 1}}, {{3}}, {{1, 1}, true}, {{2, 1}, true}, {{1, 1, 2}}};
  check_shape(mixed, 2, {});
  check_shape(mixed, 3, 4);
  check_shape({{{2}}, {{3}}, {{2, 2}}}, 2, {});
}

TEST_CASE("search: summaries are plain sums over all candidates", "[search][property]") {
  check_summary_of(test::make_problem(62, 120, menus({4, 3, 2, 3, 2}), 2, 5));
  Problem limited = test::make_problem(63, 60, menus({3, 3, 2, 2, 2, 2, 2}), 5, 5);
  limited.space.max_terms = 4;
  check_summary_of(limited);
}

TEST_CASE("search: summaries are plain sums where simple and wide forms mix", "[search][property]") {
  Problem mixed = test::make_problem(64, 150, {{{1, 2, 1}}, {{1, 1}}, {{3}}, {{1, 1}, true}, {{1, 1, 2}}, {{2}}}, 2, 5);
  check_summary_of(mixed);
  mixed.space.max_terms = 3;
  check_summary_of(mixed);
}

TEST_CASE("search: summaries leave inseparable candidates out", "[search][property]") {
  Problem problem = test::make_problem(65, 80, menus({3, 2, 3, 2, 2}), 2, 5);
  problem.columns.col(3) = problem.columns.col(1);
  problem.columns.col(8) = problem.columns.col(6) + problem.columns.col(4);
  const auto grams = test::grams_of(problem);
  const auto plain = plain::walk(problem.space, grams, lists_of(40));
  CHECK(plain.n_inseparable > 0);
  EveryInstructionSet().each([&] { check_equal(search::walk(problem.space, grams, lists_of(40)), plain, true); });
  check_summary_of(problem);
}

TEST_CASE("search: weights survive candidates that are better than expected by any factor", "[search][unit]") {
  // two columns that fit only together, and then nearly exactly: forward selection sees nothing of it
  Problem problem = test::make_problem(66, 400, menus({1, 1, 1, 1}), 1, 5);
  std::mt19937_64 random(5);
  for (Eigen::Index i = 0; i < 400; ++i) {
    const double common = 30.0 * test::normal(random);
    problem.columns(i, 0) = common + test::normal(random);
    problem.columns(i, 1) = common + test::normal(random);
    problem.responses(i, 0) = problem.columns(i, 0) - problem.columns(i, 1) + 1e-2 * test::normal(random);
  }
  check_summary_of(problem, 1e-7);
}

TEST_CASE("search: the summary is the same bits for any number of threads", "[search][property][parallel]") {
  const Problem problem = test::make_problem(67, 70, menus({6, 5, 5, 4, 4, 3, 3, 2}), 2, 5);
  const auto grams = test::grams_of(problem);
  search::WalkOptions options = with_summary();
  const auto one = search::walk(problem.space, grams, options).summary;
  const auto same = [](const search::Standing& a, const search::Standing& b) {
    return a.best_cv_sse == b.best_cv_sse && a.best_penalised_rss == b.best_penalised_rss &&
           a.log_weight == b.log_weight;
  };
  for (const unsigned threads : {2u, 4u}) {
    options.threads = threads;
    const auto several = search::walk(problem.space, grams, options).summary;
    for (std::size_t r = 0; r < one.responses.size(); ++r) {
      CHECK(same(one.responses[r].all, several.responses[r].all));
      CHECK(one.responses[r].histogram == several.responses[r].histogram);
      for (std::size_t j = 0; j < one.responses[r].of_choice.size(); ++j)
        for (std::size_t c = 0; c < one.responses[r].of_choice[j].size(); ++c)
          CHECK(same(one.responses[r].of_choice[j][c], several.responses[r].of_choice[j][c]));
    }
  }
}

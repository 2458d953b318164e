#include "judge/selection.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <limits>
#include <random>
#include <set>

namespace formsieve::judge {

namespace {

using Predictions = std::vector<std::vector<double>>;

/// A ranked list with its predictions and what fails its gate.
struct Pool {
  std::vector<Candidate> ranked;
  Predictions predictions;
  std::vector<bool> fails;
  std::size_t asked = 0;  ///< how often a gate was examined

  Witness witness(bool families, bool gates) {
    Witness witness;
    if (families)
      witness.predictions = [this](std::span<const std::size_t> indices) {
        Predictions found;
        for (const std::size_t i : indices) found.push_back(predictions[i]);
        return found;
      };
    if (!gates) return witness;
    witness.examine_gates = [this](std::span<const std::size_t> indices) { asked += indices.size(); };
    witness.passes = [this](std::size_t i) { return !fails[i]; };
    return witness;
  }
};

Pool made_pool(std::uint32_t seed, std::size_t n, std::size_t n_kinds) {
  std::mt19937 random(seed);
  std::normal_distribution<double> normal;
  std::vector<std::vector<double>> kinds(n_kinds, std::vector<double>(12));
  for (auto& kind : kinds)
    for (double& value : kind) value = 100.0 + 10.0 * normal(random);
  Pool pool;
  for (std::size_t i = 0; i < n; ++i) {
    Candidate one;
    one.rank = i + 1;
    one.number = std::to_string(i);
    if (random() % 9 != 0) one.cv.rmse = 10.0 + 0.01 * static_cast<double>(i);
    if (random() % 11 == 0) one.marks = {"simplest"};
    std::vector<double> values = kinds[random() % n_kinds];
    for (double& value : values) value += 0.3 * normal(random);  // 0.42 apart, the limit is 0.5
    if (random() % 17 == 0) values[3] = std::numeric_limits<double>::quiet_NaN();
    pool.ranked.push_back(one);
    pool.predictions.push_back(values);
    pool.fails.push_back(one.marks.empty() && random() % 3 == 0);
  }
  return pool;
}

double distance(const std::vector<double>& a, const std::vector<double>& b) {
  double sum = 0.0;
  for (std::size_t i = 0; i < a.size(); ++i) sum += (a[i] - b[i]) * (a[i] - b[i]);
  return std::sqrt(sum / static_cast<double>(a.size()));
}

/// The rule in its plainest form: one candidate after the other, every leader looked at.
std::vector<Line> plain_lines(const Pool& pool, std::size_t n, bool families, bool gates) {
  std::vector<Line> lines;
  std::size_t i = 0;
  const auto leader = [&](std::size_t of, std::size_t most) {
    for (std::size_t k = 0; families && k < most; ++k) {
      const auto& rmse = pool.ranked[lines[k].index].cv.rmse;
      if (rmse && distance(pool.predictions[of], pool.predictions[lines[k].index]) < 0.05 * *rmse) return k;
    }
    return most;
  };
  for (; i < pool.ranked.size() && lines.size() < n; ++i) {
    const std::size_t k = leader(i, lines.size());
    if (k < lines.size())
      lines[k].siblings.push_back(i);
    else if (!gates || !pool.fails[i])
      lines.push_back({i, {}, false});
  }
  const std::size_t n_leaders = lines.size();
  for (std::size_t named = 0; named < pool.ranked.size(); ++named) {
    if (pool.ranked[named].marks.empty()) continue;
    if (std::any_of(lines.begin(), lines.end(), [&](const Line& line) { return line.index == named; })) continue;
    const std::size_t k = leader(named, n_leaders);
    if (k < n_leaders && named >= i) lines[k].siblings.push_back(named);
    lines.push_back({named, {}, k < n_leaders});
  }
  std::sort(lines.begin(), lines.end(), [](const Line& a, const Line& b) { return a.index < b.index; });
  return lines;
}

bool same(const std::vector<Line>& a, const std::vector<Line>& b) {
  return std::equal(a.begin(), a.end(), b.begin(), b.end(), [](const Line& x, const Line& y) {
    return x.index == y.index && x.siblings == y.siblings && x.is_sibling == y.is_sibling;
  });
}

Candidate point(double rmse, std::size_t n_terms, std::size_t n_failing) {
  Candidate one;
  one.cv.rmse = rmse;
  one.terms.resize(n_terms);
  one.checks.resize(4);
  for (std::size_t i = 0; i < n_failing; ++i) one.checks[i].passes = false;
  return one;
}

}  // namespace

TEST_CASE("judge: select equals the rule applied one candidate after the other", "[judge][property]") {
  std::size_t with_siblings = 0, named_siblings = 0;
  for (std::uint32_t seed = 0; seed < 120; ++seed) {
    for (const bool families : {false, true})
      for (const bool gates : {false, true}) {
        Pool pool = made_pool(seed, 20 + seed, 3 + seed % 20);
        const std::size_t n = 1 + seed % 9;
        const Selection found = select(pool.ranked, n, pool.witness(families, gates));
        CAPTURE(seed, families, gates);
        REQUIRE(same(found.lines, plain_lines(pool, n, families, gates)));
        for (const Line& line : found.lines) {
          with_siblings += line.siblings.size();
          named_siblings += line.is_sibling ? 1 : 0;
        }
      }
  }
  CHECK(with_siblings > 500);
  CHECK(named_siblings > 20);
}

TEST_CASE("judge: select asks gates only as far down the ranking as the list needs", "[judge][unit]") {
  Pool pool = made_pool(7, 1000, 400);
  std::fill(pool.fails.begin(), pool.fails.end(), false);
  (void)select(pool.ranked, 5, pool.witness(true, true));
  CHECK(pool.asked > 0);
  CHECK(pool.asked <= 2 * kAskedAtOnce);
}

TEST_CASE("judge: select goes to the end of the pool when the gates let too few through", "[judge][unit]") {
  Pool pool = made_pool(3, 50, 50);
  for (std::size_t i = 0; i < 50; ++i) {
    pool.ranked[i].marks.clear();
    pool.fails[i] = i % 10 != 4;
  }
  const Selection found = select(pool.ranked, 25, pool.witness(false, true));
  REQUIRE(found.lines.size() == 5);
  CHECK(found.lines[0].index == 4);
  CHECK(found.lines[4].index == 44);
  CHECK(found.n_looked_at == 50);
}

TEST_CASE("judge: select without families and gates keeps the first by rank and every named line further down",
          "[judge][unit]") {
  Pool pool = made_pool(1, 5, 5);
  for (auto& one : pool.ranked) one.marks.clear();
  pool.ranked[3].marks = {"simplest"};
  const auto indices = [](const Selection& selection) {
    std::vector<std::size_t> result;
    for (const Line& line : selection.lines) result.push_back(line.index);
    return result;
  };
  CHECK(indices(select(pool.ranked, 1, {})) == std::vector<std::size_t>{0, 3});
  CHECK(indices(select(pool.ranked, 2, {})) == std::vector<std::size_t>{0, 1, 3});
  CHECK(indices(select(pool.ranked, 25, {})).size() == 5);
  CHECK(select({}, 5, {}).lines.empty());
}

TEST_CASE("judge: a pool of one answer is one line with all the others as siblings", "[judge][unit]") {
  Pool pool = made_pool(5, 40, 1);
  for (std::size_t i = 0; i < 40; ++i) {
    pool.ranked[i].marks.clear();
    pool.ranked[i].cv.rmse = 10.0;
    pool.predictions[i].assign(12, 100.0 + 0.01 * static_cast<double>(i));  // at most 0.39 from the first
  }
  const Selection found = select(pool.ranked, 25, pool.witness(true, false));
  REQUIRE(found.lines.size() == 1);
  CHECK(found.lines[0].siblings.size() == 39);
}

TEST_CASE("judge: candidates whose difference is exactly the limit are two families", "[judge][unit]") {
  Families families;
  families.found({0.0, 0.0}, 100.0);
  CHECK(families.home(std::vector<double>{4.9999, -4.9999}) == 0U);
  CHECK_FALSE(families.home(std::vector<double>{5.0, -5.0}));
  CHECK_FALSE(families.home(std::vector<double>{0.0, std::nan("")}));
  families.found({1.0, 1.0}, std::nullopt);
  CHECK(families.home(std::vector<double>{1.0, 1.0}) == 0U);  // the first that claims it
}

TEST_CASE("judge: the front holds what no other line beats", "[judge][property]") {
  std::mt19937 random(11);
  for (int round = 0; round < 200; ++round) {
    std::vector<Candidate> lines;
    for (std::size_t i = 0; i < 12; ++i)
      lines.push_back(point(static_cast<double>(random() % 5), random() % 4, random() % 3));
    mark_pareto(lines);
    bool any = false;
    for (const Candidate& one : lines) {
      bool beaten = false;
      for (const Candidate& other : lines) {
        const int better = (*other.cv.rmse < *one.cv.rmse) + (other.terms.size() < one.terms.size()) +
                           (n_failed(other) < n_failed(one));
        const int worse = (*other.cv.rmse > *one.cv.rmse) + (other.terms.size() > one.terms.size()) +
                          (n_failed(other) > n_failed(one));
        beaten = beaten || (better > 0 && worse == 0);
      }
      REQUIRE(one.pareto == !beaten);
      any = any || one.pareto;
    }
    REQUIRE(any);
  }
}

TEST_CASE("judge: a line without a CV error is on the front only by terms or checks", "[judge][unit]") {
  std::vector<Candidate> lines{point(5.0, 3, 1), point(0.0, 3, 1), point(0.0, 2, 3)};
  lines[1].cv.rmse.reset();
  lines[2].cv.rmse.reset();
  mark_pareto(lines);
  CHECK(lines[0].pareto);
  CHECK_FALSE(lines[1].pareto);
  CHECK(lines[2].pareto);
}

}  // namespace formsieve::judge

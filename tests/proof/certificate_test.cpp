// Certificates are accepted by a checker that shares no code with the proof, and doctored ones refused.

#include "certificate_checker.hpp"
#include "proof/scope.hpp"
#include "simulated.hpp"
#include "small_space.hpp"

#include <catch2/catch.hpp>

#include <algorithm>
#include <limits>
#include <string>
#include <vector>

using namespace formsieve;

namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();
constexpr double kScoreError = 1e-5;

using Kind = proof::Certificate;

/// A proof of a small simulated search with everything in its tree: bounds, branchings, splits and enumeration.
struct Proved {
  test::Simulated search;
  proof::Certificate certificate;
  proof::Proof result;

  static constexpr std::size_t kKeep = 12;

  explicit Proved(double sweeps_work, std::uint64_t enumerate_at = 12) {
    test::SimulatedOptions options;
    options.n_predictors = 9;
    options.n_rows = 60;
    options.criterion = "BIC";
    search = test::simulate(options);
    search.problem.space = &search.space;
    search.problem.grams = &search.grams;
    const proof::RootGram root(search.problem);
    proof::Limits limits;
    limits.keep = kKeep;
    limits.threads = 1;
    limits.certificate = &certificate;
    proof::Effort effort;
    effort.sweeps_work = sweeps_work;
    effort.enumerate_at = enumerate_at;
    result = proof::prove(root, {}, limits, {}, effort);
  }

  std::string fault() const {
    return test::fault_of(search.problem, {}, certificate, result, kKeep, kInfinity, kScoreError);
  }

  /// The first step of this kind that takes something away.
  Kind::Step& step(Kind::Reason reason) {
    for (Kind::Node& node : certificate.nodes)
      for (Kind::Step& step : node.steps)
        if (step.reason == reason && step.before.actions != step.after.actions) return step;
    FAIL("no such step");
    throw;
  }

  Kind::Node& node(Kind::End end) {
    for (Kind::Node& node : certificate.nodes)
      if (node.end == end) return node;
    FAIL("no such node");
    throw;
  }
};

}  // namespace

TEST_CASE("proof: certificates of small random spaces are accepted", "[proof][property]") {
  for (std::uint64_t seed = 600; seed < 640; ++seed) {
    test::SmallSpace small = test::draw_small_space(seed, 600);
    small.connect();
    const proof::RootGram root(small.problem);
    proof::Certificate certificate;
    proof::Limits limits;
    limits.keep = small.keep;
    limits.within = small.within;
    limits.threads = 1;
    limits.certificate = &certificate;
    proof::Effort effort;
    effort.enumerate_at = seed % 3 == 0 ? 20 : 1;
    effort.sweeps_work = static_cast<double>(seed % 2);
    effort.incumbents = seed % 4 < 2;
    const proof::Proof result = proof::prove(root, {}, limits, {}, effort);
    INFO("seed " << seed << ", nodes " << certificate.nodes.size());
    CHECK(test::fault_of(small.problem, {}, certificate, result, small.keep, small.within, kScoreError) == "");
  }
}

TEST_CASE("proof: certificates of both methods are accepted", "[proof][property]") {
  for (const double sweeps_work : {1.0, 0.0, 0.02}) {
    const Proved proved(sweeps_work);
    CHECK(proved.certificate.nodes.size() > 10);
    CHECK(proved.fault() == "");
  }
}

TEST_CASE("proof: recording changes nothing", "[proof][unit]") {
  const Proved proved(1.0);
  const proof::RootGram root(proved.search.problem);
  proof::Limits limits;
  limits.keep = Proved::kKeep;
  proof::Effort effort;
  effort.enumerate_at = 12;
  const proof::Proof plain = proof::prove(root, {}, limits, {}, effort);
  CHECK(plain.nodes == proved.result.nodes);
  CHECK(plain.best.back().choice == proved.result.best.back().choice);
}

TEST_CASE("proof: doctored certificates are refused", "[proof][unit]") {
  Proved proved(0.0);
  REQUIRE(proved.fault() == "");

  SECTION("D is too large") { proved.step(Kind::Reason::bound).d *= 2.0; }
  SECTION("D has an entry between predictors") {
    Kind::Step& step = proved.step(Kind::Reason::bound);
    step.d(0, step.d.cols() - 1) = step.d(step.d.cols() - 1, 0) = 1e-3;
  }
  SECTION("D is not symmetric") { proved.step(Kind::Reason::bound).d(0, 1) += 1e-3; }
  SECTION("a diagonal of D is negative") { proved.step(Kind::Reason::bound).d(0, 0) = -1.0; }
  SECTION("v is another") { proved.step(Kind::Reason::bound).v.array() += 0.5; }
  SECTION("an action more is struck off") {
    Kind::Step& step = proved.step(Kind::Reason::bound);
    const auto& best = proved.result.best.front().choice.choice;
    for (std::size_t j = 0; j < best.size(); ++j) step.after.actions[j] &= ~(proof::Actions{1} << best[j]);
  }
  SECTION("a bound is of a smaller problem") { proved.step(Kind::Reason::bound).problem[0] = 1; }
  SECTION("a range of columns is cut too short") {
    Kind::Step& step = proved.step(Kind::Reason::bound);
    step.after.most_columns = step.after.fewest_columns;
  }
  SECTION("a child is missing") { proved.node(Kind::End::branched).children.pop_back(); }
  SECTION("a node with a solution is missing") {
    auto& nodes = proved.certificate.nodes;
    const auto enumerated = std::find_if(nodes.rbegin(), nodes.rend(), [&](const Kind::Node& node) {
      return node.end == Kind::End::enumerated &&
             std::any_of(proved.result.best.begin(), proved.result.best.end(), [&](const proof::Listed& listed) {
               for (std::size_t j = 0; j < node.part.actions.size(); ++j)
                 if ((node.part.actions[j] >> listed.choice.choice[j] & 1) == 0) return false;
               return listed.n_columns >= node.part.fewest_columns && listed.n_columns <= node.part.most_columns;
             });
    });
    REQUIRE(enumerated != nodes.rend());
    nodes.erase(std::next(enumerated).base());
  }
  SECTION("a branched node claims that nothing is left") {
    proved.node(Kind::End::branched).end = Kind::End::nothing_left;
  }
  SECTION("a node is open") { proved.node(Kind::End::branched).end = Kind::End::open; }
  SECTION("a listed candidate is missing") {
    proved.result.best.erase(proved.result.best.begin() + 3);
    proved.result.best.push_back(proved.result.best.back());
  }
  SECTION("the list's last is replaced by a worse candidate") {
    search::Choice worse = proved.result.best.back().choice;
    worse.choice.assign(worse.choice.size(), 0);
    const proof::RootGram root(proved.search.problem);
    proof::CandidateScorer scorer(root);
    const proof::CandidateScore score = scorer(0, worse.choice);
    proved.result.best.back() = {worse, score.score, score.rss_rel, score.n_columns};
  }
  SECTION("a score is better than it is") { proved.result.best.front().score -= 0.01; }
  SECTION("the root leaves out an action") { proved.certificate.roots[0].actions[2] &= ~proof::Actions{2}; }
  SECTION("there is no root") { proved.certificate.roots.clear(); }
  CHECK(proved.fault() != "");
}

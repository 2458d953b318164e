#include "pipeline/listing.hpp"

#include "base/parallel.hpp"
#include "judge/judge.hpp"
#include "judge/selection.hpp"
#include "judge/words.hpp"
#include "pipeline/leave_out.hpp"
#include "pipeline/penalties.hpp"

#include <algorithm>
#include <span>

namespace formsieve::pipeline {

namespace {

/// What a gate has found out of a candidate so far.
enum class Standing : unsigned char { unknown, passes, fails };

class Lister {
 public:
  Lister(const Prepared& prepared, const Examiner& examiner, const run::Plan& plan,
         std::vector<judge::Candidate> candidates, const ChoiceByNumber& choices, unsigned threads,
         const ListingWatch& watch)
      : prepared_(prepared),
        examiner_(examiner),
        plan_(plan),
        candidates_(std::move(candidates)),
        choices_(choices),
        threads_(threads),
        watch_(watch),
        standing_(candidates_.size(), Standing::unknown) {}

  Result<Listing> run();

 private:
  bool gated() const { return !plan_.rank.require.empty(); }
  const search::Choice& choice_of(std::size_t index) const { return choices_.at(candidates_[index].number); }
  bool fails(const judge::Candidate& candidate) const;
  void examine_gates(std::span<const std::size_t> indices);
  bool passes(std::size_t index);
  std::vector<std::vector<double>> predictions(std::span<const std::size_t> indices) const;
  judge::Witness witness();
  Status complete(std::vector<judge::Candidate>& listed) const;
  void find_mends(std::vector<judge::Candidate>& listed) const;
  void leave_rows_out(Listing& listing) const;
  void take_lines(const judge::Selection& selection, Listing& listing) const;
  void describe_families(const judge::Selection& selection, Listing& listing) const;
  void describe_gates(const judge::Selection& selection, Listing& listing) const;

  const Prepared& prepared_;
  const Examiner& examiner_;
  const run::Plan& plan_;
  std::vector<judge::Candidate> candidates_;
  const ChoiceByNumber& choices_;
  unsigned threads_;
  const ListingWatch& watch_;
  std::vector<Standing> standing_;  // [candidates_]
  Status gate_status_;              // the first failure of a gate
};

bool Lister::fails(const judge::Candidate& candidate) const {
  const auto& require = plan_.rank.require;
  return std::any_of(candidate.checks.begin(), candidate.checks.end(), [&](const checks::Check& check) {
    return !check.passes && std::find(require.begin(), require.end(), check.name) != require.end();
  });
}

void Lister::examine_gates(std::span<const std::size_t> indices) {
  std::vector<std::size_t> open;
  for (const std::size_t i : indices)
    if (standing_[i] == Standing::unknown) open.push_back(i);
  std::vector<Status> status(open.size());
  base::parallel_for(open.size(), threads_,
                     [&](std::size_t k) { status[k] = examiner_.check(choice_of(open[k]), candidates_[open[k]]); });
  for (std::size_t k = 0; k < open.size(); ++k) {
    if (!status[k] && gate_status_) gate_status_ = status[k];
    standing_[open[k]] = fails(candidates_[open[k]]) ? Standing::fails : Standing::passes;
  }
}

bool Lister::passes(std::size_t index) {
  if (!gated()) return true;
  examine_gates(std::span(&index, 1));
  return standing_[index] == Standing::passes;
}

std::vector<std::vector<double>> Lister::predictions(std::span<const std::size_t> indices) const {
  const std::size_t step = (prepared_.data.n_rows + kComparedRows - 1) / kComparedRows;
  std::vector<std::vector<double>> result(indices.size());
  base::parallel_for(indices.size(), threads_,
                     [&](std::size_t k) { result[k] = examiner_.predictions(choice_of(indices[k]), step); });
  return result;
}

judge::Witness Lister::witness() {
  judge::Witness witness;
  if (plan_.rank.families)
    witness.predictions = [this](std::span<const std::size_t> indices) { return predictions(indices); };
  if (!gated()) return witness;
  witness.examine_gates = [this](std::span<const std::size_t> indices) { examine_gates(indices); };
  witness.passes = [this](std::size_t index) { return passes(index); };
  return witness;
}

Status Lister::complete(std::vector<judge::Candidate>& listed) const {
  if (watch_.begin) watch_.begin("examining in full what is listed", static_cast<double>(listed.size()), "candidates");
  std::vector<Status> status(listed.size());
  base::parallel_for(listed.size(), threads_, [&](std::size_t i) {
    status[i] = examiner_.complete(choices_.at(listed[i].number), listed[i]);
    if (watch_.done) watch_.done(1);
  });
  for (const auto& one : status)
    if (!one) return one;
  return {};
}

void Lister::find_mends(std::vector<judge::Candidate>& listed) const {
  for (judge::Candidate& candidate : listed)
    for (checks::Check& check : candidate.checks) check.mends = judge::mends(candidate, check, listed);
}

void Lister::leave_rows_out(Listing& listing) const {
  if (watch_.begin) watch_.begin("leaving out influential rows", 0.0, "");
  for (std::string& words : find_leaders_without_rows(prepared_, plan_, choices_, listing.candidates, threads_))
    listing.remarks.push_back(std::move(words));
}

void Lister::take_lines(const judge::Selection& selection, Listing& listing) const {
  for (const judge::Line& line : selection.lines) {
    listing.candidates.push_back(candidates_[line.index]);
    for (const std::size_t sibling : line.siblings)
      listing.candidates.back().siblings.push_back(candidates_[sibling].number);
  }
}

void Lister::describe_families(const judge::Selection& selection, Listing& listing) const {
  const std::string front =
      "a line is on the front when no other line is as good or better by CV RMSE, number of terms and failed checks, "
      "and better by one of them; only lines compete, since checks are run of them alone";
  if (!plan_.rank.families) {
    listing.family_rule = "every candidate is a line of its own (rank.families = false); " + front;
    return;
  }
  const std::string rows =
      prepared_.data.n_rows > kComparedRows ? " on a sample of the rows in use" : " on the rows in use";
  listing.family_rule =
      "two candidates are alike when the root mean squared difference of their predictions in own "
      "units" +
      rows + " is below " + judge::percent_words(judge::kAlikeShare) +
      " of the CV RMSE of the better one; the best of those alike is the line, counted as far down "
      "as the last line, rank " +
      std::to_string(selection.n_looked_at) + "; " + front;
  std::size_t lines = 0, siblings = 0;
  for (const judge::Line& line : selection.lines) {
    if (line.index < selection.n_looked_at && !line.is_sibling) ++lines;
    for (const std::size_t sibling : line.siblings) siblings += sibling < selection.n_looked_at ? 1 : 0;
  }
  if (siblings > 0)
    listing.remarks.push_back("The first " + judge::counted(selection.n_looked_at, "candidate") +
                              " by rank are shown as " + judge::counted(lines, "line") + ": " +
                              judge::counted(siblings, "other") + (siblings == 1 ? " predicts" : " predict") +
                              " nearly the same as a better line, which is why ranks are missing.");
}

void Lister::describe_gates(const judge::Selection& selection, Listing& listing) const {
  if (!gated()) return;
  std::size_t checked = 0;
  std::map<std::string, std::size_t> failures;
  for (std::size_t i = 0; i < candidates_.size(); ++i) {
    if (standing_[i] != Standing::unknown) ++checked;
    if (standing_[i] != Standing::fails) continue;
    ++listing.n_set_aside;
    for (const checks::Check& check : candidates_[i].checks)
      if (!check.passes) ++failures[check.name];
  }
  std::string which;
  for (const std::string& name : plan_.rank.require)
    which += (which.empty() ? "" : ", ") + name + " " + judge::grouped_digits(std::to_string(failures[name]));
  std::string words =
      "Required checks: of " + judge::counted(checked, "candidate") +
      " whose checks were run, from the first by rank until the list was full and for the named lines, " +
      judge::grouped_digits(std::to_string(listing.n_set_aside)) + " fail and are set aside (" + which + ")";
  if (selection.lines.size() < plan_.rank.shortlist) words += "; the pool was used up before the list was full";
  listing.remarks.push_back(words + ".");
}

Result<Listing> Lister::run() {
  const judge::Criterion criterion = criterion_of(plan_.rank.by);
  Listing listing;
  judge::put_in_order(candidates_, criterion);
  const judge::Witness witness = this->witness();
  listing.remarks = judge::name_lines(candidates_, criterion, plan_.rank.near_tie, witness.passes);
  const judge::Selection selection = judge::select(candidates_, plan_.rank.shortlist, witness);
  if (!gate_status_) return gate_status_.error();
  take_lines(selection, listing);
  if (auto status = complete(listing.candidates); !status) return status.error();
  judge::mark_pareto(listing.candidates);
  find_mends(listing.candidates);
  leave_rows_out(listing);
  describe_families(selection, listing);
  describe_gates(selection, listing);
  if (listing.candidates.empty())
    listing.remarks.push_back("No candidate passes the required checks: nothing is listed.");
  return listing;
}

}  // namespace

Result<Listing> list_candidates(const Prepared& prepared, const Examiner& examiner, const run::Plan& plan,
                                std::vector<judge::Candidate> candidates, const ChoiceByNumber& choices,
                                unsigned threads, const ListingWatch& watch) {
  return Lister(prepared, examiner, plan, std::move(candidates), choices, threads, watch).run();
}

}  // namespace formsieve::pipeline

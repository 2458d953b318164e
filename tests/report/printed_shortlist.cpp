// The plain print-out of a shortlist: every field, one after another.
#include "made_shortlist.hpp"

#include <cmath>
#include <sstream>
#include <vector>

namespace formsieve::test {

namespace {

using judge::Candidate;
using judge::Shortlist;

/// Prints fields one after another, each with its length, so that no two shortlists print alike.
class Printer {
 public:
  Printer& operator<<(const std::string& text) { return put(std::to_string(text.size()) + ":" + text); }
  Printer& operator<<(bool value) { return put(value ? "yes" : "no"); }
  Printer& operator<<(std::uint64_t value) { return put(std::to_string(value)); }
  Printer& operator<<(double value) {
    // Non-finite values share one face: JSON has only null for them.
    if (!std::isfinite(value)) return put("none");
    std::ostringstream out;
    out << std::hexfloat << value << std::signbit(value);
    return put(out.str());
  }
  Printer& operator<<(const std::optional<double>& value) { return value ? *this << *value : put("none"); }
  template <class Item>
  Printer& operator<<(const std::vector<Item>& items) {
    *this << static_cast<std::uint64_t>(items.size());
    for (const auto& item : items) *this << item;
    return *this;
  }
  template <class A, class B>
  Printer& operator<<(const std::pair<A, B>& both) {
    return *this << both.first << both.second;
  }
  Printer& operator<<(const forms::Form& f) {
    return *this << static_cast<std::uint64_t>(f.kind) << f.parameters << f.reflect << f.shift << f.levels << f.pooled;
  }
  Printer& operator<<(const judge::Term& t) { return *this << t.column << t.form; }
  Printer& operator<<(const fit::Coefficient& c) { return *this << c.term << c.value << c.se << c.se_robust; }
  Printer& operator<<(const judge::CrossValidation& v) {
    return *this << v.rmse << v.rmse_se << v.bias << v.mae << v.mae_median << v.rmse_naive << v.rmse_form_scale
                 << v.bias_form_scale << v.fold_mse << v.n_undefined;
  }
  Printer& operator<<(const checks::CheckPart& p) { return *this << p.subject << p.statistic << p.p << p.size; }
  Printer& operator<<(const checks::Check& c) {
    return *this << c.name << c.method << c.hypothesis << c.statistic << c.df << c.df2 << c.p << c.p_adjusted << c.size
                 << c.size2 << c.size_words << c.passes << c.note << c.verdict.has_value()
                 << static_cast<std::uint64_t>(c.verdict.value_or(checks::Verdict::holds)) << c.parts << c.mends;
  }
  Printer& operator<<(const checks::InfluentialRow& r) {
    return *this << r.row << r.line << r.leverage << r.cook << r.studentised << r.p_bonferroni << r.prediction_sd
                 << r.moved_term << r.moved_se << r.leader_without.has_value() << r.leader_without.value_or(0);
  }
  Printer& operator<<(const checks::RobustCoefficient& c) { return *this << c.term << c.value << c.shift_se; }
  Printer& operator<<(const checks::Influence& i) {
    return *this << i.largest_leverage << i.n_downweighted << i.rows << i.robust << i.words;
  }
  Printer& operator<<(const backtransform::Correction& c) {
    return *this << c.method << c.factor << c.cv_bias << c.cv_rmse << c.shift << c.note;
  }
  Printer& operator<<(const backtransform::Interval& i) {
    return *this << i.method << i.level << i.coverage << i.below << i.above << i.median_width_own << i.note;
  }
  Printer& operator<<(const backtransform::Summary& b) {
    return *this << b.smearing_factor << b.used << b.formula << b.corrections << b.why_used << b.mean_median_words
                 << b.intervals;
  }
  Printer& operator<<(const backtransform::Effect& e) {
    return *this << e.column << e.kind << e.from << e.to << e.from_level << e.to_level << e.at_from << e.at_to
                 << e.change << e.low << e.high << e.direction << e.declared << e.words;
  }
  Printer& operator<<(const judge::ValidRange& r) {
    const auto infinite = [](double x) { return std::isinf(x); };
    return *this << r.column << r.seen_min << r.seen_max << r.defined.lower << infinite(r.defined.lower)
                 << r.defined.upper << infinite(r.defined.upper) << r.defined.lower_closed << r.defined.upper_closed
                 << r.levels;
  }
  Printer& operator<<(const judge::PredictorMenu& m) {
    return *this << m.column << m.always << m.forms << m.labels << m.notes;
  }
  Printer& operator<<(const judge::Reach& r) {
    return *this << r.cv_rmse_form << r.cv_loss_rel << r.criterion << r.criterion_loss;
  }
  Printer& operator<<(const judge::Standing& s) {
    return *this << s.by_response << s.criterion << s.criterion_loss << s.weight_share;
  }
  Printer& operator<<(const judge::FormStanding& f) {
    *this << f.form.has_value();
    if (f.form) *this << *f.form;
    return *this << f.standing;
  }
  Printer& operator<<(const judge::PredictorProfile& p) {
    return *this << p.column << p.always << p.choices << p.weight_share;
  }
  Printer& operator<<(const judge::TermsStanding& t) {
    return *this << static_cast<std::uint64_t>(t.n_terms) << t.standing;
  }
  Printer& operator<<(const judge::ResponseProfile& r) {
    return *this << r.best << r.weight_share << r.scores.edges << r.scores.counts;
  }
  Printer& operator<<(const judge::SpaceSummary& s) {
    return *this << static_cast<std::uint64_t>(s.criterion) << s.responses << s.predictors << s.by_terms;
  }
  Printer& operator<<(const judge::ProvedReach& r) {
    *this << r.criterion << r.loss << r.loss_at_least << r.proved << r.response.has_value();
    return *this << static_cast<std::uint64_t>(r.response.value_or(0));
  }
  Printer& operator<<(const judge::ProvedChoice& c) {
    *this << c.form.has_value();
    if (c.form) *this << *c.form;
    return *this << c.reach << c.near_share;
  }
  Printer& operator<<(const judge::ProvedPredictor& p) { return *this << p.column << p.always << p.choices; }
  Printer& operator<<(const judge::ProvedTerms& t) { return *this << static_cast<std::uint64_t>(t.n_terms) << t.reach; }
  Printer& operator<<(const judge::ProofReport& p) {
    return *this << static_cast<std::uint64_t>(p.criterion) << p.proved << p.gap << p.tolerance << p.within
                 << static_cast<std::uint64_t>(p.n_near) << p.near_complete << p.responses << p.predictors << p.by_terms
                 << p.words;
  }
  Printer& operator<<(const Candidate& c);
  std::string text() const { return text_; }

 private:
  Printer& put(const std::string& text) {
    text_ += text + "|";
    return *this;
  }
  std::string text_;
};

Printer& Printer::operator<<(const Candidate& c) {
  *this << c.rank << c.number << c.marks << c.response_column << c.response << c.terms << c.equation << c.coefficients
        << c.n << c.rss << c.sigma << c.likelihood.log_likelihood << c.likelihood.aic << c.likelihood.aicc
        << std::isinf(c.likelihood.aicc) << c.likelihood.bic << c.likelihood.n_parameters << c.cv << c.r2_form_scale
        << c.r2_own_units << c.checks;
  return *this << c.back << c.ranges << c.influence << c.effects << c.pareto << c.siblings << c.cautions;
}

}  // namespace

std::string print_out(const Shortlist& s) {
  Printer out;
  out << s.formsieve << s.data.file << s.data.sha256 << s.data.response << s.data.weight << s.data.group << s.data.order
      << s.data.fold << s.data.rows_read << s.data.rows_used << s.data.dropped;
  out << s.space.candidates << s.space.scored << s.space.inseparable << s.space.strategy << s.space.strategy_why
      << s.space.complete << s.space.proved << s.space.gap << s.space.pooled << s.space.examined
      << s.space.set_aside_direction << s.space.set_aside_require << s.space.pool_formed << s.space.pool_margin
      << s.space.family_rule;
  out << s.folds.count << s.folds.repeats << s.folds.seed << s.folds.kind;
  out << static_cast<std::uint64_t>(s.criterion) << s.near_tie << s.responses << s.response_notes << s.menus
      << s.summary << s.proof << s.candidates << s.remarks << s.cautions;
  return out.text();
}

}  // namespace formsieve::test

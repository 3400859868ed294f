#pragma once
/// The derivatives by one parameter: the points asked for, what they gave, and where to look next.

#include <algorithm>
#include <array>
#include <cassert>
#include <cmath>
#include <limits>
#include <span>
#include <string>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/derivatives/audit.hpp>
#include <whet/derivatives/column_state.hpp>
#include <whet/derivatives/derivatives.hpp>
#include <whet/derivatives/kink.hpp>
#include <whet/derivatives/line.hpp>
#include <whet/derivatives/metric.hpp>
#include <whet/derivatives/probe.hpp>
#include <whet/evaluation/evaluation.hpp>

namespace whet::detail {

/// What the derivative engine may do for one parameter.
struct ColumnOptions {
  int first_rungs{3};  ///< pairs in the first round
  int budget{48};      ///< calls
};

/// One column of derivatives. Asked for points by `next`, told their answers by `tell`, in turns.
class DerivativeColumn : private ColumnState {
 public:
  DerivativeColumn(const Parameter& parameter, Eigen::VectorXd origin, const Metric& metric,
                   ColumnOptions options)
      : ColumnState(std::move(origin), metric),
        name_(parameter.name),
        line_(parameter),
        options_(options) {
    audit_.origin = readings_.origin;
    suspected_ = Kinks::none(readings_.elements());
    cleared_ = Mask::Constant(readings_.elements(), false);
    step_ = line_.first_step();
  }

  /// The values of the parameter to evaluate next; empty: nothing to do, or nothing to gain.
  /// @param goal  the size of error allowed; infinity asks only for a first estimate
  /// @throws ObservableError if every step failed
  [[nodiscard]] std::vector<double> next(double goal) {
    assert(asked_.empty());
    goal_ = goal;
    if (ended_) return {};
    if (evaluations_ == 0) {
      probing_ = step_ == 0.0;
      return ask(probing_ ? probes(line_) : first_rungs());
    }
    if (probing_) {
      probing_ = false;
      step_ = probed_step(readings_, metric_);
      readings_.keep_within(1.01 * step_);  // far probes have done their work
      return ask(first_rungs());
    }
    if (readings_.count() < 2) return ask(shrunk());
    if (std::isinf(goal)) return {};
    return ask(refined(goal));
  }

  /// The answers to what `next` asked for, in its order.
  void tell(std::span<const Evaluation> answers) {
    assert(answers.size() == asked_.size());
    for (std::size_t k = 0; k < answers.size(); ++k) {
      const double t = asked_[k];
      ++evaluations_;
      const bool huge = !answers[k].failed() && answers[k].data.lpNorm<Eigen::Infinity>() > 1e140;
      if (answers[k].failed() || huge) {  // huge: its square is beyond double precision
        words_ = huge ? "an element is above 1e140" : answers[k].failure;
        line_.failed(t);
        ++failures_[t > 0.0];
      } else if (auditing_) {
        audit_.add(t, answers[k].data);
      } else {
        readings_.add(t, answers[k].data);
        ++successes_[t > 0.0];
      }
    }
    for (const int side : {-1, 1}) {
      if (failures_[side > 0] >= 2 && successes_[side > 0] == 0 && successes_[side < 0] >= 2) {
        line_.close(side);
      }
    }
    asked_.clear();
    if (auditing_) conclude_audit();
    auditing_ = false;
    fresh_ = true;
    if (readings_.count() > 0) update(line_.fiducial());
  }

  using ColumnState::error;
  using ColumnState::scale;
  using ColumnState::value;

  [[nodiscard]] bool estimated() const noexcept { return readings_.count() > 0 && !probing_; }
  /// The size of the error; infinity before there is an estimate.
  [[nodiscard]] double error_size() const { return estimated() ? metric_.size(error()) : infinity; }
  /// False where more calls would not help.
  [[nodiscard]] bool can_improve() const noexcept { return !ended_; }

  [[nodiscard]] DerivativeReport report() const {
    DerivativeReport report{.evaluations = evaluations_, .independent_noise = independent_};
    for (Eigen::Index i = 0; i < readings_.elements(); ++i) {
      if (kink_.slope(i) > 0.0 || (unresolved_ && unresolved(i))) report.elements.push_back(i);
    }
    const ColumnError all = error();
    const double noise = metric_.size(noise_of(all, Mask::Constant(readings_.elements(), true)));
    const double rounded = metric_.size(noise_of(all, noise_.rounded));
    report.status = kink_.any()                       ? DerivativeStatus::kink
                    : flat_                           ? DerivativeStatus::flat
                    : error_size() <= goal_           ? DerivativeStatus::converged
                    : unresolved_                     ? DerivativeStatus::unresolved
                    : evaluations_ >= options_.budget ? DerivativeStatus::budget_spent
                    : rounded > 0.5 * noise           ? DerivativeStatus::rounded
                                                      : DerivativeStatus::noise_limited;
    report.note = note(report);
    return report;
  }

 private:
  static constexpr double infinity = std::numeric_limits<double>::infinity();

  // --- asking -----------------------------------------------------------------------------------

  /// The points of these displacements that are inside, new and a motion at all.
  [[nodiscard]] std::vector<double> ask(const std::vector<double>& displacements) {
    std::vector<double> values;
    const auto known = [&](double t) {
      const auto same = [t](double other) { return std::abs(t - other) <= 1e-6 * std::abs(t); };
      return std::any_of(asked_.begin(), asked_.end(), same) ||
             std::any_of(readings_.displacements.begin(), readings_.displacements.end(), same) ||
             std::any_of(audit_.displacements.begin(), audit_.displacements.end(), same);
    };
    for (const double wanted : displacements) {
      if (evaluations_ + static_cast<int>(values.size()) >= options_.budget) break;
      const Place place = line_.place(wanted);
      const double t = place.displacement;
      if (t == 0.0 || !std::isfinite(place.value) || known(t)) continue;
      asked_.push_back(t);
      values.push_back(place.value);
    }
    if (values.empty()) end();
    return values;
  }

  /// The displacements of several rungs.
  [[nodiscard]] std::vector<double> rungs_of(const std::vector<double>& steps) const {
    std::vector<double> all;
    for (const double step : steps) {
      for (const double t : line_.rung(std::max(step, line_.smallest_step()))) all.push_back(t);
    }
    return all;
  }

  [[nodiscard]] std::vector<double> first_rungs() const {
    const double top = line_.fitted(step_);
    const bool one_sided = line_.rung(top).size() < 2;
    const int count = !one_sided ? options_.first_rungs : metric_.in_noise_units ? 3 : 4;
    std::vector<double> steps;
    for (int k = 0; k < count; ++k) steps.push_back(std::ldexp(top, -k));
    return rungs_of(steps);
  }

  /// Too many calls failed: much smaller steps.
  [[nodiscard]] std::vector<double> shrunk() {
    if (++shrinks_ > 4 || line_.room(1) + line_.room(-1) <= 0.0) {
      fail<ObservableError>(
          {.where = "derivatives",
           .what = "parameter " + in_quotes(name_) + ": the observable failed at every step from " +
                   text(line_.fiducial()) + "; it said: " + words_,
           .advice = "State the domain of the code by .lower and .upper, or a smaller .scale."});
    }
    step_ = std::ldexp(step_, -3 * shrinks_);
    return rungs_of({line_.fitted(step_), 0.5 * line_.fitted(step_)});
  }

  // --- refining ---------------------------------------------------------------------------------

  [[nodiscard]] std::vector<double> refined(double goal) {
    const Totals e = totals();
    const double length = scale();
    if (flat()) return flat_steps();
    if (metric_.in_noise_units && !restarted_) {
      restarted_ = true;
      const double moved = top_move();
      if (e.all > 5.0 * goal && moved > 2.8) {
        const double step = ladder_top() * 0.7 / moved;
        return rungs_of({step, 0.5 * step});
      }
    }
    if (const auto steps = kink_steps(goal); !steps.empty()) return steps;
    if (unresolved_structure_) {
      unresolved_structure_ = false;
      jumped_ = true;
      const double outer = ladder_bottom() * audit_parts[0] / audit_parts[1];
      return rungs_of({2.0 * outer, 0.5 * outer});
    }
    if (e.all <= goal) {
      if (!(jumped_ || audited_) || supported()) return {};
      return more({0.5 * ladder_bottom(), 0.25 * ladder_bottom()});
    }

    const bool noisy =
        e.noise > 0.5 * goal && e.noise >= e.truncation &&
        (confirmed(e.noise) || metric_.size({Eigen::VectorXd::Zero(readings_.elements()),
                                             estimate_.least_noise, independent_}) > e.all);
    const bool unconverged = !noisy && e.truncation > 0.3 * length;
    unresolved_ = false;
    if (fresh_) {
      fresh_ = false;
      if (e.all < 0.6 * best_) {
        best_ = e.all;
        stalled_ = 0;
      } else if (++stalled_ >= (unconverged ? 8 : 3)) {
        unresolved_ = unconverged;
        end();
        return {};
      }
    }
    if (noisy && !audited_ && !rounded(e.noise)) return audit_steps();
    if (unconverged) return jump_down();
    return noisy ? up(e) : down(e);
  }

  /// Nothing moves: far steps, then give up.
  [[nodiscard]] std::vector<double> flat_steps() {
    const double top = ladder_top(), step = line_.fitted(16.0 * top);
    if (++flat_rounds_ > 2 || step < 1.05 * top) {
      flat_ = true;
      end();
      return {};
    }
    return rungs_of({step});
  }

  /// Nearer and nearer, with two rungs that agree or not.
  [[nodiscard]] std::vector<double> jump_down() {
    const std::vector<Rung>& rungs = windows_.rungs_of(0);
    const double bottom = ladder_bottom();
    if (rungs.size() > 1 && rungs[1].step > 7.0 * bottom) {
      return rungs_of({2.0 * bottom, 0.5 * bottom});
    }
    jumped_ = true;
    const double factor = jumps_++ == 0 ? 8.0 : 64.0;
    return rungs_of({bottom / factor, 0.5 * bottom / factor});
  }

  [[nodiscard]] std::vector<double> down(const Totals& e) {
    const double bottom = ladder_bottom();
    const auto touching = (estimate_.bottom.array() <= 1.001 * bottom).eval();
    if (const double step = gap(false); step > 0.0) return rungs_of({step});
    if (confirmed(e.noise) && metric_.size(error().of(touching)) < 0.5 * e.all && balanced_++)
      return {};
    return more({0.5 * bottom, 0.25 * bottom});
  }

  [[nodiscard]] std::vector<double> up(const Totals& e) {
    const double top = ladder_top();
    const auto touching = (estimate_.top.array() >= top / 1.001).eval();
    if (const double step = gap(true); step > 0.0) return rungs_of({step});
    if (metric_.size(error().of(touching)) < 0.5 * e.all && balanced_++) return {};
    static constexpr std::array<double, 5> factors{2.0, 2.0, 4.0, 16.0, 256.0};
    const double factor =
        e.noise > 20.0 * e.truncation ? factors[std::min(ups_++, factors.size() - 1)] : 2.0;
    const double step = line_.fitted(factor * top);
    if (step < 1.05 * top) return {};
    if (factor > 2.0) return rungs_of({step, 0.5 * step});
    return more({step, 2.0 * step});
  }

  /// One rung of two points, or two of one.
  [[nodiscard]] std::vector<double> more(const std::array<double, 2>& steps) const {
    std::vector<double> all = rungs_of({steps[0]});
    if (all.size() < 2) all = rungs_of({steps[0], steps[1]});
    return all;
  }

  // --- the audit and kinks ----------------------------------------------------------------------

  [[nodiscard]] std::vector<double> audit_steps() {
    audited_ = auditing_ = true;
    std::vector<double> all;
    for (const double part : audit_parts) {
      const double step = std::max(part * ladder_bottom(), line_.smallest_step());
      const std::vector<double> pair = line_.rung(step);
      all.insert(all.end(), pair.begin(), pair.end());
      if (pair.size() == 1) all.push_back(0.63 * pair[0]);
    }
    return all;
  }

  void conclude_audit() {
    const Eigen::Index n = readings_.elements();
    if (audit_.count() < 3) return;
    Mask structure = Mask::Constant(n, false);
    bool open = false;
    for (Eigen::Index i = 0; i < n; ++i) {
      if (suspected_.slope(i) > 0.0) {
        const int verdict = settle_kink(audit_, i, noise_.level(i), suspected_, ladder_bottom());
        if (verdict > 0) kink_.slope(i) = suspected_.slope(i);
        if (verdict < 0) cleared_(i) = true;
        open = open || verdict == 0;
      }
      if (noise_.rounded(i)) continue;
      const Finding finding = judge_audit(audit_, i, noise_.level(i), line_.fiducial(),
                                          estimate_.value(i), estimate_.noise(i), bounds_);
      structure(i) = finding == Finding::structure;
      if (finding == Finding::none) refuted_(i) = noise_.level(i);
    }
    kink_settled_ = suspected_.any() && !open;
    if (structure.any() && !kink_.any() &&
        metric_.size(noise_of(error(), structure)) > 0.5 * totals().noise) {
      unresolved_structure_ = true;
      for (Eigen::Index k = 0; k < audit_.count(); ++k) {
        readings_.add(audit_.displacements[static_cast<std::size_t>(k)], audit_.values.col(k));
      }
    }
  }

  /// What a suspected kink needs: an audit, then smaller pairs; empty: nothing.
  [[nodiscard]] std::vector<double> kink_steps(double goal) {
    if (kink_settled_) {
      if (kink_.any()) end();
      return {};
    }
    const Kinks before = suspected_;
    suspected_ = suspected_kinks(readings_, windows_, noise_, audited_);
    for (Eigen::Index i = 0; i < suspected_.slope.size(); ++i) {
      // The same kink, not another accident of noise.
      const bool other =
          kink_retested_ && !(before.slope(i) > 0.0 && suspected_.slope(i) > 0.5 * before.slope(i));
      if (other || cleared_(i)) suspected_.slope(i) = 0.0;
    }
    const bool matters = metric_.length(suspected_.slope) > 0.1 * goal;
    if (!matters) {
      if (kink_retested_) kink_settled_ = true;
      return {};
    }
    if (!audited_) return audit_steps();
    if (!kink_retested_) {
      kink_retested_ = true;
      return rungs_of({ladder_bottom() / 8.0, ladder_bottom() / 16.0});
    }
    kink_ = suspected_;
    kink_settled_ = true;
    end();
    return {};
  }

  void end() noexcept { ended_ = true; }

  [[nodiscard]] std::string note(const DerivativeReport& report) const {
    std::string note;
    const auto say = [&](const std::string& sentence) {
      if (!note.empty()) note += "; ";
      note += sentence;
    };
    const bool both = successes_[0] > 0 && successes_[1] > 0;
    if (!both) say(std::string("one-sided, from ") + (successes_[1] > 0 ? "above" : "below"));
    if (failures_[0] + failures_[1] > 0) {
      say("some calls failed: " + words_);
    }
    if (report.status == DerivativeStatus::flat) say("nothing moves, as far as steps may go");
    return note;
  }

  std::string name_;
  Line line_;
  Readings audit_;
  ColumnOptions options_;

  std::vector<double> asked_;  // displacements not yet answered
  double step_{0.0};           // the first step
  double goal_{infinity};
  int evaluations_{0};
  std::array<int, 2> failures_{}, successes_{};  // below and above
  std::string words_;                            // of the last failure

  bool probing_{false}, jumped_{false}, fresh_{false}, ended_{false}, restarted_{false};
  int shrinks_{0}, stalled_{0}, jumps_{0}, balanced_{0}, flat_rounds_{0};
  std::size_t ups_{0};
  double best_{infinity};
  bool flat_{false}, unresolved_structure_{false};
  bool audited_{false}, auditing_{false};
  Kinks suspected_;  // kinks not settled
  Mask cleared_;     // of the suspicion of a kink
  bool kink_settled_{false}, kink_retested_{false};
};

}  // namespace whet::detail

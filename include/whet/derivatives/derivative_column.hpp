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

#include <whet/derivatives/column_state.hpp>
#include <whet/derivatives/derivatives.hpp>
#include <whet/derivatives/inquiry.hpp>
#include <whet/derivatives/ladder_moves.hpp>
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
class DerivativeColumn {
 public:
  DerivativeColumn(const Parameter& parameter, Eigen::VectorXd origin, const Metric& metric,
                   ColumnOptions options)
      : name_(parameter.name),
        options_(options),
        line_(parameter),
        state_(std::move(origin), metric),
        inquiry_(state_.readings.origin),
        step_(line_.first_step()) {}

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
      step_ = probed_step(state_.readings, state_.metric);
      state_.readings.keep_within(1.01 * step_);  // far probes have done their work
      return ask(first_rungs());
    }
    if (state_.readings.count() < 2) return ask(shrunk());
    if (std::isinf(goal)) return {};
    return ask(refined());
  }

  /// The answers to what `next` asked for, in its order.
  void tell(std::span<const Evaluation> answers) {
    assert(answers.size() == asked_.size());
    for (std::size_t k = 0; k < answers.size(); ++k) take(asked_[k], answers[k]);
    for (const int side : {-1, 1}) {
      if (failures_[side > 0] >= 2 && successes_[side > 0] == 0 && successes_[side < 0] >= 2) {
        line_.close(side);
      }
    }
    asked_.clear();
    if (inquiry_.auditing()) inquiry_.conclude(state_, line_.fiducial());
    fresh_ = true;
    if (state_.readings.count() > 0) state_.update(line_.fiducial());
  }

  [[nodiscard]] const Eigen::VectorXd& value() const noexcept { return state_.estimate.value; }
  [[nodiscard]] ColumnError error() const { return state_.error(); }
  [[nodiscard]] double scale() const { return state_.scale(); }
  [[nodiscard]] bool estimated() const noexcept { return state_.readings.count() > 0 && !probing_; }
  /// The size of the error; infinity before there is an estimate.
  [[nodiscard]] double error_size() const {
    return estimated() ? state_.metric.size(error()) : infinity;
  }
  /// False where more calls would not help.
  [[nodiscard]] bool can_improve() const noexcept { return !ended_; }

  [[nodiscard]] DerivativeReport report() const {
    DerivativeReport report{.evaluations = evaluations_, .independent_noise = state_.independent};
    for (Eigen::Index i = 0; i < state_.readings.elements(); ++i) {
      if (state_.kinks.slope(i) > 0.0 || state_.unresolved(i)) report.elements.push_back(i);
    }
    report.status = state_.kinks.any()                      ? DerivativeStatus::kink
                    : flat_                                 ? DerivativeStatus::flat
                    : error_size() <= goal_                 ? DerivativeStatus::converged
                    : state_.has_unresolved                 ? DerivativeStatus::unresolved
                    : evaluations_ >= options_.budget       ? DerivativeStatus::budget_spent
                    : state_.rounded(state_.totals().noise) ? DerivativeStatus::rounded
                                                            : DerivativeStatus::noise_limited;
    const auto say = [&](const std::string& sentence) {
      report.note += (report.note.empty() ? "" : "; ") + sentence;
    };
    if (successes_[0] == 0 || successes_[1] == 0) {
      say(std::string("one-sided, from ") + (successes_[1] > 0 ? "above" : "below"));
    }
    if (failures_[0] + failures_[1] > 0) say("some calls failed: " + words_);
    if (report.status == DerivativeStatus::flat) say("nothing moves, as far as steps may go");
    return report;
  }

 private:
  static constexpr double infinity = std::numeric_limits<double>::infinity();

  /// The points of these displacements that are inside, new and a motion at all.
  [[nodiscard]] std::vector<double> ask(const std::vector<double>& wanted) {
    std::vector<double> values;
    for (const double displacement : wanted) {
      if (evaluations_ + static_cast<int>(values.size()) >= options_.budget) break;
      const Place place = line_.place(displacement);
      const double t = place.displacement;
      if (t == 0.0 || !std::isfinite(place.value)) continue;
      if (among(asked_, t) || among(state_.readings.displacements, t) ||
          among(inquiry_.audit_points(), t)) {
        continue;
      }
      asked_.push_back(t);
      values.push_back(place.value);
    }
    if (values.empty()) ended_ = true;
    return values;
  }

  [[nodiscard]] static bool among(const std::vector<double>& all, double t) {
    return std::any_of(all.begin(), all.end(),
                       [t](double other) { return std::abs(t - other) <= 1e-6 * std::abs(t); });
  }

  void take(double t, const Evaluation& answer) {
    ++evaluations_;
    double largest = 0.0;
    for (Eigen::Index i = 0; i < answer.data.size(); ++i) {
      largest = std::max(largest, std::abs(answer.data(i)));
    }
    const bool huge = largest > 1e140;  // its square is beyond double precision
    if (answer.failed() || huge) {
      words_ = answer.failed() ? answer.failure : "an element is above 1e140";
      line_.failed(t);
      ++failures_[t > 0.0];
    } else if (inquiry_.auditing()) {
      inquiry_.add(t, answer.data);
    } else {
      state_.readings.add(t, answer.data);
      ++successes_[t > 0.0];
    }
  }

  [[nodiscard]] std::vector<double> first_rungs() const {
    return first_ladder(line_, step_, options_.first_rungs, state_.metric.in_noise_units);
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
    return displacements(line_, {line_.fitted(step_), 0.5 * line_.fitted(step_)});
  }

  /// Where to look next for an error of the goal.
  [[nodiscard]] std::vector<double> refined() {
    const ColumnState::Totals e = state_.totals();
    if (state_.flat()) {
      std::vector<double> steps = moves_.away(state_, line_);
      flat_ = steps.empty();
      return steps;
    }
    if (state_.metric.in_noise_units && e.all > 5.0 * goal_) {
      // Where steps are this far apart, going down rung by rung would not do.
      const double step = quiet_step(e);
      if (step < 0.5 * state_.ladder_bottom()) return displacements(line_, {step, 0.5 * step});
    }
    if (auto steps = inquiry_.kink_steps(state_, line_, goal_); !steps.empty()) return steps;
    if (inquiry_.settled() && state_.kinks.any()) ended_ = true;
    if (inquiry_.take_structure()) {
      // The audit's points have joined the ladder: go on from where its bottom was.
      return moves_.jump_to(line_, 0.25 * state_.ladder_bottom() / audit_parts[1]);
    }
    if (e.all <= goal_) {
      if (!(moves_.jumped() || inquiry_.audited()) || state_.supported()) return {};
      return pair_of(line_, 0.5 * state_.ladder_bottom(), 0.25 * state_.ladder_bottom());
    }
    const bool rounding = state_.rounding_only(e.noise, line_.fiducial());
    // Differences that are all rounding make a truncation of up to twice the noise.
    const bool noisy = e.noise > 0.5 * goal_ && e.noise >= (rounding ? 0.5 : 1.0) * e.truncation &&
                       (state_.confirmed(e.noise) || state_.least_noise() > e.all);
    const bool unconverged = !noisy && e.truncation > 0.3 * state_.scale();
    state_.has_unresolved = false;
    if (fresh_ && stalled(e.all, unconverged ? 8 : 3)) {
      state_.has_unresolved = unconverged;
      ended_ = true;
      return {};
    }
    if (noisy && !rounding && !inquiry_.audited() && !state_.rounded(e.noise)) {
      return inquiry_.audit(state_, line_);
    }
    if (unconverged) return moves_.jump_down(state_, line_);
    return noisy ? moves_.up(state_, line_, e, rounding) : moves_.down(state_, line_, e);
  }

  /// The step that moves the data by about a standard deviation; not so near that the noise of the
  /// code would spoil the goal, as far as that noise is known.
  [[nodiscard]] double quiet_step(const ColumnState::Totals& e) const {
    constexpr double best_move = 0.7;   // where two rungs have the least error
    constexpr double deviations = 3.0;  // of the rounding, as in the claim
    const double top = state_.ladder_top();
    const double noise =  // of a step of 1: it falls with the step
        std::max(state_.confirmed(e.noise) ? e.noise * top : 0.0, deviations * state_.rounding());
    return std::max(top * best_move / state_.top_move(), noise / (0.5 * goal_));
  }

  /// Has the error failed to fall for so many rounds?
  [[nodiscard]] bool stalled(double error, int rounds) {
    fresh_ = false;
    if (error < 0.6 * best_) {
      best_ = error;
      stalled_ = 0;
      return false;
    }
    return ++stalled_ >= rounds;
  }

  std::string name_;
  ColumnOptions options_;
  Line line_;
  ColumnState state_;
  LadderMoves moves_;
  Inquiry inquiry_;

  std::vector<double> asked_;  // displacements not yet answered
  double step_;                // the first step
  double goal_{infinity};
  int evaluations_{0};
  std::array<int, 2> failures_{}, successes_{};  // below and above
  std::string words_;                            // of the last failure

  bool probing_{false}, fresh_{false}, ended_{false}, flat_{false};
  int shrinks_{0}, stalled_{0};
  double best_{infinity};
};

}  // namespace whet::detail

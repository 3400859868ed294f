#pragma once
/// Noise, structure or a kink? What the ladder leaves open is asked very near the fiducial point.

#include <algorithm>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/derivatives/audit.hpp>
#include <whet/derivatives/column_state.hpp>
#include <whet/derivatives/kink.hpp>
#include <whet/derivatives/ladder_moves.hpp>
#include <whet/derivatives/line.hpp>
#include <whet/derivatives/noise_floor.hpp>
#include <whet/derivatives/readings.hpp>

namespace whet::detail {

/// The one audit of a column, and the kinks under suspicion.
class Inquiry {
 public:
  explicit Inquiry(const Eigen::VectorXd& origin)
      : audit_{.origin = origin},
        suspected_(Kinks::none(origin.size())),
        cleared_(Mask::Constant(origin.size(), false)) {}

  /// The points of an audit: its readings stay apart from the ladder's.
  [[nodiscard]] std::vector<double> audit(const ColumnState& state, const Line& line) {
    audited_ = auditing_ = true;
    std::vector<double> all;
    for (const double part : audit_parts) {
      const double step = std::max(part * state.ladder_bottom(), line.smallest_step());
      const std::vector<double> pair = line.rung(step);
      all.insert(all.end(), pair.begin(), pair.end());
      if (pair.size() == 1) all.push_back(0.63 * pair[0]);
    }
    return all;
  }
  [[nodiscard]] bool auditing() const noexcept { return auditing_; }
  [[nodiscard]] bool audited() const noexcept { return audited_; }
  [[nodiscard]] const std::vector<double>& audit_points() const noexcept {
    return audit_.displacements;
  }
  void add(double t, const Eigen::VectorXd& data) { audit_.add(t, data); }

  /// All points of the audit are answered: `state` learns what they tell.
  void conclude(ColumnState& state, double fiducial) {
    auditing_ = false;
    if (audit_.count() < 3) return;
    const Eigen::Index n = audit_.elements();
    Mask structure = Mask::Constant(n, false);
    bool open = false, any_structure = false;
    const CrowdNoise crowd = crowd_noise(audit_, suspected_);
    for (Eigen::Index i = 0; i < n; ++i) {
      const double level = state.noise.level(i);
      if (suspected_.slope(i) > 0.0) {
        const int verdict = settle_kink(audit_, i, level, crowd.at(audit_.origin(i)), suspected_,
                                        state.ladder_bottom());
        if (verdict > 0) state.kinks.slope(i) = suspected_.slope(i);
        if (verdict < 0) cleared_(i) = true;
        open = open || verdict == 0;
      }
      if (state.noise.rounded(i)) continue;
      const Finding finding = judge_audit(audit_, i, level, fiducial, state.estimate.value(i),
                                          state.estimate.noise(i), state.bounds);
      structure(i) = finding == Finding::structure;
      any_structure = any_structure || structure(i);
      if (finding == Finding::none) state.refuted(i) = level;
    }
    settled_ = suspected_.any() && !open;
    if (any_structure && !state.kinks.any() &&
        state.noise_of(structure) > 0.5 * state.totals().noise) {
      found_structure_ = true;
      for (Eigen::Index k = 0; k < audit_.count(); ++k) {
        state.readings.add(audit_.displacements[static_cast<std::size_t>(k)], audit_.values.col(k));
      }
    }
  }

  /// The audit was concluded by structure, and its points joined the ladder. True once.
  [[nodiscard]] bool take_structure() noexcept { return std::exchange(found_structure_, false); }

  /// What a suspected kink needs: an audit, then smaller pairs; empty: nothing. A kink that holds
  /// out against both is settled in `state`.
  [[nodiscard]] std::vector<double> kink_steps(ColumnState& state, const Line& line, double goal) {
    if (settled_) return {};
    const Kinks before = suspected_;
    suspected_ = suspected_kinks(state.readings, state.windows, state.noise, audited_);
    for (Eigen::Index i = 0; i < suspected_.slope.size(); ++i) {
      // The same kink, not another accident of noise.
      const bool other =
          retested_ && !(before.slope(i) > 0.0 && suspected_.slope(i) > 0.5 * before.slope(i));
      if (other || cleared_(i)) suspected_.slope(i) = 0.0;
    }
    const bool matters = state.metric.length(suspected_.slope) > 0.1 * goal;
    if (matters && !audited_) return audit(state, line);
    if (matters && !retested_) {
      retested_ = true;
      const double bottom = state.ladder_bottom();
      return displacements(line, {bottom / 8.0, bottom / 16.0});
    }
    if (matters) state.kinks = suspected_;
    settled_ = retested_;
    return {};
  }
  [[nodiscard]] bool settled() const noexcept { return settled_; }

 private:
  Readings audit_;
  Kinks suspected_;  // kinks not settled
  Mask cleared_;     // of the suspicion of a kink
  bool audited_{false}, auditing_{false}, found_structure_{false};
  bool settled_{false}, retested_{false};
};

}  // namespace whet::detail

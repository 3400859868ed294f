#pragma once
/// Which rungs to add to the ladder of steps of one parameter: nearer, farther, or between.

#include <algorithm>
#include <array>
#include <cmath>
#include <cstddef>
#include <limits>
#include <vector>

#include <Eigen/Core>

#include <whet/derivatives/column_state.hpp>
#include <whet/derivatives/line.hpp>

namespace whet::detail {

/// The displacements of rungs of these steps, none too small to move the parameter.
[[nodiscard]] inline std::vector<double> displacements(const Line& line,
                                                       const std::vector<double>& steps) {
  std::vector<double> all;
  for (const double step : steps) {
    for (const double t : line.rung(std::max(step, line.smallest_step()))) all.push_back(t);
  }
  return all;
}

/// One rung of two points, or two of one.
[[nodiscard]] inline std::vector<double> pair_of(const Line& line, double step, double next) {
  std::vector<double> all = displacements(line, {step});
  if (all.size() < 2) all = displacements(line, {step, next});
  return all;
}

/// The ladder with which a column begins. @param rungs  where both sides have room
[[nodiscard]] inline std::vector<double> first_ladder(const Line& line, double step, int rungs,
                                                      bool in_noise_units) {
  const double top = line.fitted(step);
  const bool one_sided = line.rung(top).size() < 2;
  const int count = !one_sided ? rungs : in_noise_units ? 3 : 4;
  std::vector<double> steps(static_cast<std::size_t>(count), top);
  for (std::size_t k = 1; k < steps.size(); ++k) steps[k] = 0.5 * steps[k - 1];
  return displacements(line, steps);
}

/// Moves a ladder to where the error is least, and remembers how often it tried. Every move gives
/// displacements; none: it would not help.
class LadderMoves {
 public:
  /// Truncation is the larger part: nearer, until noise of the same size is at the bottom.
  [[nodiscard]] std::vector<double> down(const ColumnState& state, const Line& line,
                                         const ColumnState::Totals& e) {
    const double bottom = state.ladder_bottom();
    const double between = gap(state, false, false);
    if (between > 0.0) return displacements(line, {between});
    const auto touching = [&](Eigen::Index i) {
      return state.estimate.bottom(i) <= 1.001 * bottom;
    };
    if (state.confirmed(e.noise) && balanced(state, touching, e)) return {};
    return pair_of(line, 0.5 * bottom, 0.25 * bottom);
  }

  /// Noise is the larger part: farther. @param rounding  it is no more, and no structure
  [[nodiscard]] std::vector<double> up(const ColumnState& state, const Line& line,
                                       const ColumnState::Totals& e, bool rounding) {
    const double top = state.ladder_top();
    const double between = gap(state, true, rounding);
    if (between > 0.0) return displacements(line, {between});
    const auto touching = [&](Eigen::Index i) { return state.estimate.top(i) >= top / 1.001; };
    if (balanced(state, touching, e)) return {};
    static constexpr std::array<double, 5> factors{2.0, 2.0, 4.0, 16.0, 256.0};
    const double factor =
        e.noise > 20.0 * e.truncation ? factors[std::min(ups_++, factors.size() - 1)] : 2.0;
    const double step = line.fitted(factor * top);
    if (step < 1.05 * top) return {};
    return factor > 2.0 ? displacements(line, {step, 0.5 * step}) : pair_of(line, step, 2.0 * step);
  }

  /// Nothing converges yet: nearer and nearer, with two rungs that agree or not.
  [[nodiscard]] std::vector<double> jump_down(const ColumnState& state, const Line& line) {
    const double bottom = state.ladder_bottom();
    if (state.ladder().size() > 1 && state.ladder()[1].step > 7.0 * bottom) {
      return displacements(line, {2.0 * bottom, 0.5 * bottom});
    }
    jumped_ = true;
    const double factor = jumps_++ == 0 ? 8.0 : 64.0;
    return displacements(line, {bottom / factor, 0.5 * bottom / factor});
  }

  /// Nothing moves: far steps, then give up.
  [[nodiscard]] std::vector<double> away(const ColumnState& state, const Line& line) {
    const double top = state.ladder_top(), step = line.fitted(16.0 * top);
    if (++flat_rounds_ > 2 || step < 1.05 * top) return {};
    return displacements(line, {step});
  }

  /// To a step, past what lies between: two rungs there.
  [[nodiscard]] std::vector<double> jump_to(const Line& line, double step) {
    jumped_ = true;
    return displacements(line, {2.0 * step, 0.5 * step});
  }

  /// The ladder has left where it began.
  [[nodiscard]] bool jumped() const noexcept { return jumped_; }

 private:
  /// A gap of the ladder beside the windows in use, or inside too, filled at its middle; 0: none.
  [[nodiscard]] static double gap(const ColumnState& state, bool above, bool inside) {
    const std::vector<Rung>& rungs = state.ladder();
    const Estimate& e = state.estimate;
    const auto share = [&](Eigen::Index i) {
      return (std::abs(e.truncation(i)) + e.noise(i)) /
             std::max(e.slope(i), std::numeric_limits<double>::min());
    };
    Eigen::Index worst = 0;
    for (Eigen::Index i = 1; i < e.value.size(); ++i) {
      if (share(i) > share(worst)) worst = i;
    }
    const double edge = above ? e.top(worst) : e.bottom(worst);
    // Rounding is that of the smallest step of a window, however far the window reaches.
    const double low = 0.999 * (inside ? e.bottom(worst) : edge), high = 1.001 * edge;
    for (std::size_t r = 0; r + 1 < rungs.size(); ++r) {
      const double near = above ? rungs[r].step : rungs[r + 1].step;
      if (near > low && near < high && rungs[r + 1].step > 3.2 * rungs[r].step) {
        return std::sqrt(rungs[r].step * rungs[r + 1].step);
      }
    }
    return 0.0;
  }

  /// The windows that would move carry less than half of the error: one more rung, then enough.
  template <class Touching>
  [[nodiscard]] bool balanced(const ColumnState& state, const Touching& touching,
                              const ColumnState::Totals& e) {
    return state.metric.size(state.error().of(touching)) < 0.5 * e.all && balanced_++ > 0;
  }

  int jumps_{0}, balanced_{0}, flat_rounds_{0};
  std::size_t ups_{0};
  bool jumped_{false};
};

}  // namespace whet::detail

#pragma once
/// How far the steps of a window are from no step at all: the truncation error.

#include <algorithm>
#include <cmath>
#include <cstddef>
#include <limits>
#include <vector>

#include <Eigen/Core>

#include <whet/derivatives/window.hpp>
#include <whet/derivatives/window_entries.hpp>

namespace whet::detail {

/// The truncation error of every window of one element.
class Truncation {
 public:
  Truncation(const Windows& windows, const WindowEntries& entries)
      : windows_(windows),
        e_(entries),
        error_(windows.size()),
        factor_(Eigen::VectorXd::Zero(windows.size())) {
    for (Eigen::Index m = 0; m < windows.size(); ++m) error_(m) = of(m);
    for (int family = 0; family < 3; ++family) guard(family);
    resolve_conflicts();
  }

  [[nodiscard]] const Eigen::VectorXd& error() const noexcept { return error_; }

 private:
  static constexpr double infinity = std::numeric_limits<double>::infinity();

  [[nodiscard]] double distance(Eigen::Index a, Eigen::Index b) const {
    return std::abs(e_.value(a) - e_.value(b));
  }

  /// From the step to its neighbour: the error of the smaller window, times what one more rung is
  /// seen to gain.
  [[nodiscard]] double of(Eigen::Index m) {
    const Window& w = windows_[m];
    if (w.neighbour < 0) return infinity;
    if (w.length() == 1) return 2.0 * distance(m, w.neighbour);
    // A difference below its own noise proves nothing.
    const double d1 = distance(m, m - 1), sure = std::hypot(d1, 0.7 * e_.difference(m));
    if (w.length() == 2) {
      factor_(m) = w.paired ? 0.5 : 1.0;
      return 3.0 * sure;
    }
    const std::vector<Rung>& rungs = windows_.rungs_of(w.family);
    const double d0 = distance(m - 1, m - 2);
    const double gain = rungs[w.last].gain() / rungs[w.last - 1].gain();
    const double seen = d0 > 0.0 ? 2.0 * sure / d0 * gain : 1.0;
    factor_(m) = std::max(std::clamp(seen, 0.02, 1.0), 0.3 * factor_(m - 1));
    const double error = (w.paired ? 2.0 : 3.0) * factor_(m) * sure;
    return std::max(error, factor_(m) * slow_convergence(w, m));
  }

  /// Romberg's ratio: windows of equal length at three steps differ by what their order says, or
  /// the function bends by a lower power of the step, as t^1.5 does.
  [[nodiscard]] double slow_convergence(const Window& w, Eigen::Index m) const {
    const Eigen::Index low = windows_.find(w.family, w.first, w.last - 2),
                       middle = windows_.find(w.family, w.first + 1, w.last - 1),
                       high = windows_.find(w.family, w.first + 2, w.last);
    const double near = distance(low, middle), far = distance(middle, high);
    if (near <= e_.noise(m)) return 0.0;
    const double expected = (windows_[high].gain - windows_[middle].gain) /
                            (windows_[middle].gain - windows_[low].gain);
    if (far >= 0.5 * expected * near) return 0.0;
    const std::vector<Rung>& rungs = windows_.rungs_of(w.family);
    const double r = std::sqrt(rungs[w.first + 2].step / rungs[w.first].step);
    const double power = std::max(std::log(far / near) / std::log(r), 0.05);
    return (w.paired ? 2.0 : 3.2) * near /
           (std::pow(rungs[w.first + 1].step / rungs[w.first].step, power) - 1.0);
  }

  /// Where slopes at growing steps stop to differ more, the steps are beyond what the function
  /// lets extrapolate (aliased, saturated, past a pole): small slopes there would look certain.
  void guard(int family) {
    constexpr double doubt = 20.0;  // a level of few draws, the least of many elements, is low
    const std::vector<Rung>& rungs = windows_.rungs_of(family);
    const std::size_t count = rungs.size();
    for (std::size_t i = 0; i + 2 < count; ++i) {
      const Eigen::Index a = windows_.find(family, i, i), b = windows_.find(family, i + 1, i + 1),
                         c = windows_.find(family, i + 2, i + 2);
      const double near = distance(a, b), far = distance(b, c);
      const double expected =
          (windows_[c].gain - windows_[b].gain) / (windows_[b].gain - windows_[a].gain);
      if (near <= std::min(doubt * e_.noise(a), e_.change(a)) ||
          far >= std::pow(expected, 0.3) * near) {
        continue;
      }
      const Eigen::Index end =
          windows_.find(family, count - 1, count - 1) + 1;  // they lie in order
      for (Eigen::Index m = a; m < end; ++m) {
        error_(m) = std::max(error_(m), 1e6 * std::max(std::abs(e_.value(m)), near));
      }
      return;
    }
  }

  /// Small steps win: a window that contradicts a sure one of smaller top errs by the difference.
  void resolve_conflicts() {
    const auto& order = windows_.by_top();
    double low = -infinity, high = infinity, low_error = 0.0, high_error = 0.0;
    for (std::size_t start = 0; start < order.size();) {
      std::size_t end = start;
      const double top = windows_[order[start]].top;
      while (end < order.size() && windows_[order[end]].top == top) ++end;
      for (std::size_t k = start; k < end; ++k) {
        const Eigen::Index m = order[k];
        const double value = e_.value(m), total = error_(m) + e_.noise(m);
        if (value - total > high) error_(m) = value - high + 2.0 * high_error;
        if (value + total < low) error_(m) = std::max(error_(m), low - value + 2.0 * low_error);
      }
      for (; start < end; ++start) {
        const Eigen::Index m = order[start];
        const double value = e_.value(m), total = error_(m) + e_.noise(m);
        if (!(total < 0.1 * std::abs(value))) continue;
        if (value - total > low) low = value - total, low_error = total;
        if (value + total < high) high = value + total, high_error = total;
      }
    }
  }

  const Windows& windows_;
  const WindowEntries& e_;
  Eigen::VectorXd error_;
  Eigen::VectorXd factor_;  // what the last rung of a window gains
};

}  // namespace whet::detail

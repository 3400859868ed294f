#pragma once
/// The derivative of every element: which window to believe, and how far.

#include <algorithm>
#include <cmath>
#include <cstddef>
#include <limits>
#include <vector>

#include <Eigen/Core>

#include <whet/derivatives/noise_floor.hpp>
#include <whet/derivatives/readings.hpp>
#include <whet/derivatives/window.hpp>

namespace whet::detail {

/// All windows of one element: the derivative each gives, and what is uncertain about it.
struct WindowEntries {
  Eigen::VectorXd value{};       ///< the derivative
  Eigen::VectorXd noise{};       ///< what the noise may add to it
  Eigen::VectorXd difference{};  ///< the same of its difference from its neighbour
  Eigen::VectorXd change{};      ///< what a change of the values by half a percent would do
};

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
    const std::vector<Rung>& rungs = windows_.rungs_of(family);
    const std::size_t count = rungs.size();
    for (std::size_t i = 0; i + 2 < count; ++i) {
      const Eigen::Index a = windows_.find(family, i, i), b = windows_.find(family, i + 1, i + 1),
                         c = windows_.find(family, i + 2, i + 2);
      const double near = distance(a, b), far = distance(b, c);
      const double expected =
          (windows_[c].gain - windows_[b].gain) / (windows_[b].gain - windows_[a].gain);
      if (near <= std::min(1.5 * e_.noise(a), e_.change(a)) ||
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

/// A window picked for one element, and its claim.
struct Choice {
  Eigen::Index window{};
  double truncation{};  ///< signed: from the neighbour to the window
  double noise{};
};

/// The window of least error. Whoever picks the least of many errors is lucky in part (the winner's
/// curse): windows up to eight times as uncertain must lie within the claim.
[[nodiscard]] inline Choice choose_window(const Windows& windows, const WindowEntries& entries,
                                          const Eigen::VectorXd& truncation) {
  Choice choice;
  const Eigen::VectorXd total = truncation + entries.noise;
  const double best = total.minCoeff(&choice.window);
  const double value = entries.value(choice.window);
  const double claim =
      (total.array() < 8.0 * best).select((entries.value.array() - value).abs(), best).maxCoeff();
  const double widening = best > 0.0 && std::isfinite(best) ? std::max(1.0, claim / best) : 1.0;
  const Eigen::Index neighbour = windows[choice.window].neighbour;
  const double towards = neighbour < 0 ? 1.0 : value - entries.value(neighbour);
  choice.truncation = std::copysign(widening * truncation(choice.window), towards);
  choice.noise = widening * entries.noise(choice.window);
  return choice;
}

/// The derivatives of all elements by one parameter.
struct Estimate {
  Eigen::VectorXd value{};          ///< n
  Eigen::VectorXd truncation{};     ///< n, signed
  Eigen::VectorXd noise{};          ///< n, >= 0
  Eigen::VectorXd slope{};          ///< n, the largest |d/t| within the window
  Eigen::VectorXd least_noise{};    ///< n, of the smallest rung alone
  Eigen::VectorXd bottom{}, top{};  ///< n, smallest and largest step of the window
};

/// @param fiducial  the value of the parameter: its rounding is noise too
[[nodiscard]] inline Estimate estimate_elements(const Readings& readings, const Windows& windows,
                                                const NoiseFloor& noise, double fiducial) {
  constexpr double eps = std::numeric_limits<double>::epsilon() / 2.0;
  constexpr Eigen::Index chunk = 256;  // keeps the elements x windows of a chunk in the cache
  const Eigen::Index n = readings.elements(), count = windows.size();
  const double deviations = n >= 16 ? 3.0 : 4.5;
  const Eigen::MatrixXd& w = windows.weights();
  const Eigen::MatrixXd w2 = w.cwiseAbs2();
  const Eigen::RowVectorXd origin2 = windows.origin_weights().cwiseAbs2();
  Eigen::MatrixXd step_w = w;  // weights of the differences between neighbours
  for (Eigen::Index m = 0; m < count; ++m) {
    if (windows[m].neighbour >= 0) step_w.col(m) -= w.col(windows[m].neighbour);
  }
  const Eigen::MatrixXd step_w2 = step_w.cwiseAbs2();
  const Eigen::RowVectorXd step_origin2 = step_w.colwise().sum().cwiseAbs2();
  const Eigen::RowVectorXd plain2 = w2.colwise().sum() + origin2;
  Eigen::Map<const Eigen::RowVectorXd> t(readings.displacements.data(), readings.count());

  Estimate all;
  for (Eigen::VectorXd* part : {&all.value, &all.truncation, &all.noise, &all.slope,
                                &all.least_noise, &all.bottom, &all.top}) {
    part->setZero(n);
  }
  const Eigen::MatrixXd growth2 = readings.growths().cwiseAbs2();
  for (Eigen::Index start = 0; start < n; start += chunk) {
    const Eigen::Index rows = std::min(chunk, n - start);
    const Eigen::VectorXd f0 = readings.origin.segment(start, rows);
    const Eigen::MatrixXd f = readings.values.middleRows(start, rows);
    const Eigen::MatrixXd d = f.colwise() - f0;
    const Eigen::VectorXd level = noise.level.segment(start, rows);
    const Eigen::MatrixXd g2 = growth2.middleRows(start, rows);

    const Eigen::MatrixXd value = d * w;
    const Eigen::MatrixXd spread2 = (g2 * w2).rowwise() + origin2;  // A^2
    const Eigen::MatrixXd step_spread2 = (g2 * step_w2).rowwise() + step_origin2;
    // Rounding of the values, and of the argument inside the code.
    Eigen::MatrixXd rounding2 = f.cwiseAbs2() * w2 + f0.cwiseAbs2() * origin2;
    rounding2 += ((0.8 * fiducial * value).array().square().rowwise() * plain2.array()).matrix();
    const Eigen::VectorXd level2 = level.cwiseAbs2();
    const Eigen::MatrixXd size =
        deviations *
        ((spread2.array().colwise() * level2.array()) + eps * eps * rounding2.array()).sqrt();

    for (Eigen::Index i = 0; i < rows; ++i) {
      const double largest = std::max(std::abs(f0(i)), f.row(i).lpNorm<Eigen::Infinity>());
      const WindowEntries entries{
          .value = value.row(i).transpose(),
          .noise = size.row(i).transpose(),
          .difference = level(i) * step_spread2.row(i).cwiseSqrt().transpose(),
          .change = 5e-3 * deviations * largest * spread2.row(i).cwiseSqrt().transpose()};
      const Truncation truncation(windows, entries);
      const Choice choice = choose_window(windows, entries, truncation.error());
      const Window& window = windows[choice.window];
      const Eigen::Index at = start + i;
      const Eigen::RowVectorXd slopes = (d.row(i).array() / t.array()).abs();
      all.value(at) = entries.value(choice.window);
      all.truncation(at) = choice.truncation;
      all.noise(at) = choice.noise;
      all.bottom(at) = window.bottom;
      all.top(at) = window.top;
      all.slope(at) = (t.array().abs() <= window.top).select(slopes, 0.0).maxCoeff();
      all.least_noise(at) = entries.noise(0);
      if (!std::isfinite(all.truncation(at))) {  // one rung alone tells no error
        all.truncation(at) = 10.0 * slopes.maxCoeff();
      }
    }
  }
  return all;
}

}  // namespace whet::detail

#pragma once
/// What every window makes of the values of one element.

#include <algorithm>
#include <cmath>
#include <cstddef>
#include <limits>
#include <vector>

#include <Eigen/Core>

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

/// Makes the entries of all windows of an element from its readings, by weights and norms that all
/// elements share.
class EntryTable {
 public:
  /// @param fiducial  the value of the parameter: its rounding is noise too
  EntryTable(const Readings& readings, const Windows& windows, double fiducial)
      : readings_(readings),
        terms_(static_cast<std::size_t>(windows.size())),
        origin2_(windows.size()),
        step_origin2_(windows.size()),
        plain2_(windows.size()),
        deviations_(readings.elements() >= 16 ? 3.0 : 4.5),
        argument_(0.8 * fiducial) {
    for (Eigen::Index m = 0; m < windows.size(); ++m) {
      const Eigen::Index neighbour = windows[m].neighbour;
      double step_sum = 0.0, square_sum = 0.0;
      for (Eigen::Index k = 0; k < readings.count(); ++k) {
        const double weight = windows.weights()(k, m);
        const double step = neighbour < 0 ? weight : weight - windows.weights()(k, neighbour);
        if (weight == 0.0 && step == 0.0) continue;
        terms_[static_cast<std::size_t>(m)].push_back({k, weight, square(weight), square(step)});
        step_sum += step;
        square_sum += square(weight);
      }
      origin2_(m) = square(windows.origin_weights()(m));
      step_origin2_(m) = square(step_sum);
      plain2_(m) = square_sum + origin2_(m);
    }
  }

  /// @param level  the noise of element i
  [[nodiscard]] WindowEntries of(Eigen::Index i, double level) const {
    constexpr double eps = std::numeric_limits<double>::epsilon() / 2.0;
    const Eigen::Index count = origin2_.size();
    WindowEntries entries{.value = Eigen::VectorXd(count),
                          .noise = Eigen::VectorXd(count),
                          .difference = Eigen::VectorXd(count),
                          .change = Eigen::VectorXd(count)};
    const Eigen::VectorXd f = readings_.values_of(i), growth = readings_.growths_of(i);
    const double f0 = readings_.origin(i);
    double largest = std::abs(f0);
    for (Eigen::Index k = 0; k < f.size(); ++k) largest = std::max(largest, std::abs(f(k)));
    for (Eigen::Index m = 0; m < count; ++m) {
      double value = 0.0, spread2 = 0.0, step_spread2 = 0.0, rounding2 = 0.0;
      for (const Term& term : terms_[static_cast<std::size_t>(m)]) {
        const double at = f(term.node), growth2 = square(growth(term.node));
        value += term.weight * (at - f0);
        spread2 += term.weight2 * growth2;
        step_spread2 += term.step2 * growth2;
        rounding2 += term.weight2 * square(at);
      }
      spread2 += origin2_(m);
      step_spread2 += step_origin2_(m);
      // Rounding of the values, and of the argument inside the code.
      rounding2 += square(f0) * origin2_(m) + square(argument_ * value) * plain2_(m);
      entries.value(m) = value;
      entries.noise(m) = deviations_ * std::sqrt(spread2 * square(level) + eps * eps * rounding2);
      entries.difference(m) = level * std::sqrt(step_spread2);
      entries.change(m) = 5e-3 * deviations_ * largest * std::sqrt(spread2);
    }
    return entries;
  }

 private:
  /// A node of a window: its weight, and the squares of that and of its change from the neighbour.
  struct Term {
    Eigen::Index node;
    double weight, weight2, step2;
  };

  [[nodiscard]] static double square(double x) noexcept { return x * x; }

  const Readings& readings_;
  std::vector<std::vector<Term>> terms_;  // of each window
  Eigen::VectorXd origin2_, step_origin2_, plain2_;
  double deviations_, argument_;
};

}  // namespace whet::detail

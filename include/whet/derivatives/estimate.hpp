#pragma once
/// The derivative of every element: which window to believe, and how far.

#include <algorithm>
#include <cmath>
#include <cstddef>

#include <Eigen/Core>

#include <whet/derivatives/noise_floor.hpp>
#include <whet/derivatives/readings.hpp>
#include <whet/derivatives/truncation.hpp>
#include <whet/derivatives/window.hpp>
#include <whet/derivatives/window_entries.hpp>

namespace whet::detail {

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
  const auto total = [&](Eigen::Index m) { return truncation(m) + entries.noise(m); };
  for (Eigen::Index m = 1; m < windows.size(); ++m) {
    if (total(m) < total(choice.window)) choice.window = m;
  }
  const double best = total(choice.window), value = entries.value(choice.window);
  double claim = best;
  for (Eigen::Index m = 0; m < windows.size(); ++m) {
    if (total(m) < 8.0 * best) claim = std::max(claim, std::abs(entries.value(m) - value));
  }
  const double widening = best > 0.0 && std::isfinite(best) ? claim / best : 1.0;
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
  Estimate all;
  for (Eigen::VectorXd* part : {&all.value, &all.truncation, &all.noise, &all.slope,
                                &all.least_noise, &all.bottom, &all.top}) {
    part->setZero(readings.elements());
  }
  const EntryTable table(readings, windows, fiducial);
  for (Eigen::Index i = 0; i < readings.elements(); ++i) {
    const WindowEntries entries = table.of(i, noise.level(i));
    const Truncation truncation(windows, entries);
    const Choice choice = choose_window(windows, entries, truncation.error());
    const Window& window = windows[choice.window];
    all.value(i) = entries.value(choice.window);
    all.truncation(i) = choice.truncation;
    all.noise(i) = choice.noise;
    all.bottom(i) = window.bottom;
    all.top(i) = window.top;
    all.least_noise(i) = entries.noise(0);
    double steepest = 0.0;
    for (Eigen::Index k = 0; k < readings.count(); ++k) {
      const double t = readings.displacements[static_cast<std::size_t>(k)];
      const double slope = std::abs((readings.values(i, k) - readings.origin(i)) / t);
      steepest = std::max(steepest, slope);
      if (std::abs(t) <= window.top) all.slope(i) = std::max(all.slope(i), slope);
    }
    // One rung alone tells no error.
    if (!std::isfinite(all.truncation(i))) all.truncation(i) = 10.0 * steepest;
  }
  return all;
}

}  // namespace whet::detail

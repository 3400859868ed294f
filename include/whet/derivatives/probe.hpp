#pragma once
/// The scale of a parameter whose fiducial value is zero, from steps over fifteen decades.

#include <algorithm>
#include <cmath>
#include <limits>
#include <utility>
#include <vector>

#include <whet/derivatives/line.hpp>
#include <whet/derivatives/metric.hpp>
#include <whet/derivatives/readings.hpp>

namespace whet::detail {

/// Where the fiducial value is zero and nothing else is known: steps over fifteen decades.
[[nodiscard]] inline std::vector<double> probes(const Line& line) {
  const int side = line.room(1) >= line.room(-1) ? 1 : -1;
  std::vector<double> all;
  for (int decade = -9; decade <= 6; decade += 3) {
    const double t = Line::first_part * std::pow(10.0, decade);
    if (t <= line.room(side)) all.push_back(side * t);
  }
  if (all.empty()) all.push_back(side * line.fitted(1.0));
  return all;
}

/// The far end of the first chain of probes with like slopes; else the first that moved at all.
[[nodiscard]] inline double probed_step(const Readings& readings, const Metric& metric) {
  const double noise =
      100.0 * std::numeric_limits<double>::epsilon() / 2.0 * metric.length(readings.origin);
  std::vector<std::pair<double, double>> slopes;  // of those that moved: step, slope
  for (Eigen::Index k = 0; k < readings.count(); ++k) {
    const double t = std::abs(readings.displacements[static_cast<std::size_t>(k)]);
    const double change = metric.length(readings.change(k));
    if (change > noise) slopes.emplace_back(t, change / t);
  }
  if (slopes.empty()) return Line::first_part;
  for (std::size_t k = 0; k + 1 < slopes.size(); ++k) {
    const auto alike = [&](std::size_t a) {
      return a + 1 < slopes.size() && std::abs(slopes[a].second - slopes[a + 1].second) <
                                          0.3 * std::max(slopes[a].second, slopes[a + 1].second);
    };
    if (!alike(k)) continue;
    while (alike(k)) ++k;
    return slopes[k].first;
  }
  return slopes.front().first;
}

}  // namespace whet::detail

#pragma once
/// The line of points along one parameter: how far it may be moved, and by how much at first.

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>
#include <vector>

#include <whet/parameters/parameter.hpp>

namespace whet::detail {

/// A point of the line: the value of the parameter, and its exact distance from the fiducial value.
struct Place {
  double value{};
  double displacement{};
};

/// Displacements of one parameter from its fiducial value x, and the room on each side: the bounds,
/// and what is learnt from calls that fail.
class Line {
 public:
  /// The first step as a part of the scale. No round number: a linear function of a round step has
  /// few digits, and so looks like output that was rounded.
  static constexpr double first_part = 0.10370194816713;

  explicit Line(const Parameter& p)
      : x_(p.fiducial), lower_(p.lower), upper_(p.upper), room_{x_ - lower_, upper_ - x_} {
    const double width = upper_ - lower_;
    const double scale = p.scale > 0.0 ? p.scale : std::abs(x_);
    first_ = scale > 0.0 ? first_part * scale : std::isfinite(width) ? 0.3 * first_part * width : 0;
  }

  [[nodiscard]] double fiducial() const noexcept { return x_; }

  /// The first step that the scale suggests; 0: no scale is known, and it has to be probed.
  [[nodiscard]] double first_step() const noexcept { return first_; }

  /// The displacement t, kept inside the bounds and exact: value - fiducial == displacement.
  [[nodiscard]] Place place(double t) const noexcept {
    const double value = std::clamp(x_ + t, lower_, upper_);
    return {value, value - x_};
  }

  /// The room on a side (-1 or +1), in the unit of the parameter.
  [[nodiscard]] double room(int side) const noexcept { return room_[side > 0]; }

  /// A call at t failed: that side ends before it.
  void failed(double t) noexcept {
    double& room = room_[t > 0.0];
    room = std::min(room, 0.55 * std::abs(t));
  }

  /// Give a side up.
  void close(int side) noexcept { room_[side > 0] = 0.0; }

  /// The side to work on where only one has room enough for steps of about h: -1 or +1; 0: both.
  /// Nearer than a 32nd of h on one side and wide on the other is one-sided.
  [[nodiscard]] int only_side(double h) const noexcept {
    const auto [near, far] = std::minmax(room_[0], room_[1]);
    if (near >= h / 32.0 || far < 8.0 * near) return 0;
    return room_[1] >= room_[0] ? 1 : -1;
  }

  /// The largest step not above h that fits, on both sides where both are used.
  [[nodiscard]] double fitted(double h) const noexcept {
    const int side = only_side(h);
    const double most = side == 0 ? std::min(room_[0], room_[1]) : room(side);
    // Off the bound by an odd part of it: see first_part.
    return h <= most ? h : 0.9713904817 * most;
  }

  /// The smallest step that still moves the parameter by a good number of its last places.
  [[nodiscard]] double smallest_step() const noexcept {
    return std::max(32.0 * std::numeric_limits<double>::epsilon() * std::abs(x_),
                    1e4 * std::numeric_limits<double>::min());
  }

  /// The displacements of a rung of step h: a pair, or a single one where a side has no room.
  [[nodiscard]] std::vector<double> rung(double h) const {
    std::vector<double> steps;
    for (const int side : {1, -1}) {
      if (h <= room(side)) steps.push_back(side * h);
    }
    return steps;
  }

 private:
  double x_, lower_, upper_;
  std::array<double, 2> room_;
  double first_{};
};

}  // namespace whet::detail

#pragma once
/// What is known of one column of derivatives: readings, noise, estimate, error.

#include <algorithm>
#include <cmath>
#include <limits>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/derivatives/audit.hpp>
#include <whet/derivatives/estimate.hpp>
#include <whet/derivatives/kink.hpp>
#include <whet/derivatives/metric.hpp>
#include <whet/derivatives/noise_floor.hpp>
#include <whet/derivatives/readings.hpp>
#include <whet/derivatives/window.hpp>

namespace whet::detail {

/// The readings of one parameter and what follows from them; `DerivativeColumn` decides what to
/// read next.
struct ColumnState {
  /// The error in numbers, in the metric.
  struct Totals {
    double all, truncation, noise;
  };

  Metric metric;
  Readings readings;
  NoiseBounds bounds;
  Eigen::VectorXd refuted;  ///< n, noise levels that an audit refuted; infinity: none
  Windows windows{std::vector<double>{}};
  NoiseFloor noise{};
  Estimate estimate{};
  Kinks kinks;  ///< settled
  bool independent{false};
  bool has_unresolved{false};  ///< some elements have structure finer than any step

  ColumnState(Eigen::VectorXd origin, const Metric& sizes)
      : metric(sizes), readings{.origin = std::move(origin)} {
    const Eigen::Index n = readings.elements();
    refuted = Eigen::VectorXd::Constant(n, std::numeric_limits<double>::infinity());
    bounds = {Eigen::VectorXd::Zero(n), refuted};
    kinks = Kinks::none(n);
  }

  /// Make of the readings what can be made. @param fiducial  the value of the parameter
  void update(double fiducial) {
    windows = Windows(readings.displacements);
    noise = noise_floor(readings, windows, bounds);
    for (Eigen::Index i = 0; i < refuted.size(); ++i) {
      noise.confirmed(i) = noise.confirmed(i) && noise.level(i) < 0.01 * refuted(i);
    }
    estimate = estimate_elements(readings, windows, noise, fiducial);
    independent = shown_independent(noise, readings.origin, estimate.value);
  }

  /// The size of the column, for an accuracy relative to it: where the derivative all but vanishes,
  /// a tenth of the slopes it was made from.
  [[nodiscard]] double scale() const {
    return readings.count() == 0
               ? 0.0
               : std::max(metric.length(estimate.value), 0.1 * metric.length(estimate.slope));
  }

  /// The error of every element; a kink claims most of the jump of the slope.
  [[nodiscard]] ColumnError error() const {
    ColumnError error{estimate.truncation, estimate.noise, independent};
    for (Eigen::Index i = 0; i < error.truncation.size(); ++i) {
      double least = 0.6 * kinks.slope(i);
      if (unresolved(i)) least = std::max(least, 10.0 * estimate.slope(i));
      if (least > std::abs(error.truncation(i))) {
        error.truncation(i) = std::copysign(least, error.truncation(i));
      }
    }
    return error;
  }

  [[nodiscard]] Totals totals() const {
    const ColumnError all = error();
    return {metric.size(all), metric.size(all.of_truncation()), metric.size(all.of_noise())};
  }
  /// The size of the noise of some elements.
  [[nodiscard]] double noise_of(const Mask& chosen) const {
    return metric.size(error().of_noise().of(chosen));
  }
  /// Noise counts as seen where the elements that carry it have seen it.
  [[nodiscard]] bool confirmed(double total) const {
    return noise_of(noise.confirmed) > 0.5 * total;
  }
  [[nodiscard]] bool rounded(double total) const { return noise_of(noise.rounded) > 0.5 * total; }
  /// Noise that is no more than rounding has nothing to tell an audit.
  [[nodiscard]] bool rounding_only(double total, double fiducial) const {
    Mask plain(refuted.size());
    for (Eigen::Index i = 0; i < plain.size(); ++i) {
      plain(i) = noise.level(i) <= most_rounding(readings.origin(i), fiducial, estimate.value(i));
    }
    return noise_of(plain) > 0.5 * total;
  }
  /// The rounding of the values themselves, in the metric.
  [[nodiscard]] double rounding() const {
    return std::numeric_limits<double>::epsilon() * metric.length(readings.origin);
  }
  /// The size of the noise had the smallest rung been used alone.
  [[nodiscard]] double least_noise() const {
    return metric.size(
        {Eigen::VectorXd::Zero(readings.elements()), estimate.least_noise, independent});
  }

  [[nodiscard]] bool unresolved(Eigen::Index i) const {
    return has_unresolved && std::abs(estimate.truncation(i)) >
                                 std::max(estimate.noise(i), 0.3 * std::abs(estimate.value(i)));
  }
  /// Nothing has moved.
  [[nodiscard]] bool flat() const {
    for (Eigen::Index k = 0; k < readings.count(); ++k) {
      for (Eigen::Index i = 0; i < readings.elements(); ++i) {
        if (readings.values(i, k) != readings.origin(i)) return false;
      }
    }
    return true;
  }

  [[nodiscard]] const std::vector<Rung>& ladder() const { return windows.rungs_of(0); }
  [[nodiscard]] double ladder_top() const { return ladder().back().step; }
  [[nodiscard]] double ladder_bottom() const { return ladder().front().step; }

  /// Three neighbouring rungs at the bottom of the ladder: two may agree by accident where the
  /// function is known to have structure.
  [[nodiscard]] bool supported() const {
    return ladder().size() >= 3 && ladder()[2].step < 10.0 * ladder()[0].step;
  }

  /// How far the largest step moves the data.
  [[nodiscard]] double top_move() const {
    double most = 0.0;
    for (const Eigen::Index k : {ladder().back().plus, ladder().back().minus}) {
      if (k >= 0) most = std::max(most, metric.length(readings.change(k)));
    }
    return most;
  }
};

}  // namespace whet::detail

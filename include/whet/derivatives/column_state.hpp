#pragma once
/// What is known of one column of derivatives: readings, noise, estimate, error.

#include <algorithm>
#include <cmath>
#include <limits>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/derivatives/estimate.hpp>
#include <whet/derivatives/kink.hpp>
#include <whet/derivatives/metric.hpp>

namespace whet::detail {

/// The readings of one parameter and what follows from them; `DerivativeColumn` decides what to
/// read next.
class ColumnState {
 public:
  /// The size of the column, for an accuracy relative to it: where the derivative all but vanishes,
  /// a tenth of the slopes it was made from.
  [[nodiscard]] double scale() const {
    return readings_.count() == 0
               ? 0.0
               : std::max(metric_.length(estimate_.value), 0.1 * metric_.length(estimate_.slope));
  }
  [[nodiscard]] const Eigen::VectorXd& value() const noexcept { return estimate_.value; }

  /// The error of every element; a kink claims most of the jump of the slope.
  [[nodiscard]] ColumnError error() const {
    ColumnError error{estimate_.truncation, estimate_.noise, independent_};
    for (Eigen::Index i = 0; i < error.truncation.size(); ++i) {
      double least = 0.6 * kink_.slope(i);
      if (unresolved_ && unresolved(i)) least = std::max(least, 10.0 * estimate_.slope(i));
      if (least > std::abs(error.truncation(i))) {
        error.truncation(i) = std::copysign(least, error.truncation(i));
      }
    }
    return error;
  }

 protected:
  static constexpr double infinity = std::numeric_limits<double>::infinity();

  /// The error in numbers, in the metric.
  struct Totals {
    double all, truncation, noise;
  };

  ColumnState(Eigen::VectorXd origin, const Metric& metric)
      : metric_(metric), readings_{.origin = std::move(origin)} {
    const Eigen::Index n = readings_.elements();
    bounds_ = {Eigen::VectorXd::Zero(n), Eigen::VectorXd::Constant(n, infinity)};
    refuted_ = bounds_.most;
    kink_ = Kinks::none(n);
  }

  /// Make of the readings what can be made. @param fiducial  the value of the parameter
  void update(double fiducial) {
    windows_ = Windows(readings_.displacements);
    noise_ = noise_floor(readings_, windows_, bounds_);
    noise_.confirmed = noise_.confirmed && noise_.level.array() < 0.01 * refuted_.array();
    estimate_ = estimate_elements(readings_, windows_, noise_, fiducial);
    independent_ = shown_independent(noise_, readings_.origin, estimate_.value);
  }

  [[nodiscard]] static ColumnError noise_of(const ColumnError& error, const Mask& mask) {
    return {Eigen::VectorXd::Zero(error.noise.size()),
            mask.select(error.noise.array(), 0.0).matrix(), error.independent_noise};
  }
  [[nodiscard]] Totals totals() const {
    const ColumnError all = error();
    const Eigen::VectorXd none = Eigen::VectorXd::Zero(all.noise.size());
    return {metric_.size(all), metric_.size({all.truncation, none, independent_}),
            metric_.size({none, all.noise, independent_})};
  }
  /// Noise counts as seen where the elements that carry it have seen it.
  [[nodiscard]] bool confirmed(double noise) const {
    return metric_.size(noise_of(error(), noise_.confirmed)) > 0.5 * noise;
  }
  [[nodiscard]] bool rounded(double noise) const {
    return metric_.size(noise_of(error(), noise_.rounded)) > 0.5 * noise;
  }
  [[nodiscard]] bool unresolved(Eigen::Index i) const {
    return std::abs(estimate_.truncation(i)) >
           std::max(estimate_.noise(i), 0.3 * std::abs(estimate_.value(i)));
  }
  [[nodiscard]] bool flat() const {
    return (readings_.values.colwise() - readings_.origin).isZero(0.0);
  }
  [[nodiscard]] double ladder_top() const { return windows_.rungs_of(0).back().step; }
  [[nodiscard]] double ladder_bottom() const { return windows_.rungs_of(0).front().step; }

  /// How far the largest step moves the data.
  [[nodiscard]] double top_move() const {
    const Rung& rung = windows_.rungs_of(0).back();
    double most = 0.0;
    for (const Eigen::Index k : {rung.plus, rung.minus}) {
      if (k >= 0) most = std::max(most, metric_.length(readings_.values.col(k) - readings_.origin));
    }
    return most;
  }

  /// Three neighbouring rungs at the bottom of the ladder: two may agree by accident where the
  /// function is known to have structure.
  [[nodiscard]] bool supported() const {
    const std::vector<Rung>& rungs = windows_.rungs_of(0);
    return rungs.size() >= 3 && rungs[2].step < 10.0 * rungs[0].step;
  }

  /// A gap of the ladder beside the windows in use, filled at its middle; 0: none.
  [[nodiscard]] double gap(bool above) const {
    const std::vector<Rung>& rungs = windows_.rungs_of(0);
    Eigen::Index worst = 0;
    const Eigen::VectorXd share =
        (estimate_.truncation.cwiseAbs() + estimate_.noise)
            .cwiseQuotient(estimate_.slope.cwiseMax(std::numeric_limits<double>::min()));
    share.maxCoeff(&worst);
    for (std::size_t r = 0; r + 1 < rungs.size(); ++r) {
      const double edge = above ? estimate_.top(worst) : estimate_.bottom(worst);
      const double near = above ? rungs[r].step : rungs[r + 1].step;
      if (std::abs(near - edge) < 1e-3 * edge && rungs[r + 1].step > 3.2 * rungs[r].step) {
        return std::sqrt(rungs[r].step * rungs[r + 1].step);
      }
    }
    return 0.0;
  }

  Metric metric_;
  Readings readings_;
  NoiseBounds bounds_;
  Eigen::VectorXd refuted_;  // noise levels that an audit refuted; infinity: none
  Windows windows_{std::vector<double>{}};
  NoiseFloor noise_;
  Estimate estimate_;
  Kinks kink_;  // settled
  bool unresolved_{false};
  bool independent_{false};
};

}  // namespace whet::detail

#pragma once
/// Is there a kink or a jump at the fiducial value itself? Even and odd parts of a function across
/// it tell: no smooth function has a part that is odd in |t|.

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>
#include <vector>

#include <Eigen/Core>

#include <whet/derivatives/noise_floor.hpp>
#include <whet/derivatives/readings.hpp>
#include <whet/derivatives/window.hpp>

namespace whet::detail {

/// The coefficient of a singular term in one part of the function, by divided differences in h^2
/// that cancel every smooth term.
struct SingularFit {
  Eigen::VectorXd weights{};   ///< of the part at each pair
  Eigen::VectorXd previous{};  ///< the same with the largest pair left out
  Eigen::VectorXd change{};    ///< from these to those
};

/// Weights of the coefficient X in part(h) = X h^a + h^b (a + b h^2 + ...):
/// DD[part/h^b]/DD[h^(a-b)].
[[nodiscard]] inline SingularFit singular_fit(const std::vector<double>& steps, int singular,
                                              int smooth) {
  const auto weights = [&](std::size_t count) {
    Eigen::VectorXd w = Eigen::VectorXd::Zero(static_cast<Eigen::Index>(steps.size()));
    std::vector<double> squares;
    for (std::size_t k = 0; k < count; ++k) squares.push_back(steps[k] * steps[k]);
    const Eigen::VectorXd c =
        count > 1 ? difference_weights(squares) : Eigen::VectorXd(Eigen::VectorXd::Ones(1));
    double unit = 0.0;
    for (std::size_t k = 0; k < count; ++k) {
      const auto at = static_cast<Eigen::Index>(k);
      unit += c(at) * std::pow(steps[k], singular - smooth);
      w(at) = c(at) / std::pow(steps[k], smooth);
    }
    for (Eigen::Index k = 0; k < w.size(); ++k) w(k) /= unit;
    return w;
  };
  SingularFit fit{weights(steps.size()), weights(steps.size() - 1)};
  fit.change = fit.weights;
  for (Eigen::Index k = 0; k < fit.change.size(); ++k) fit.change(k) -= fit.previous(k);
  return fit;
}

/// Kinks and jumps at the fiducial value.
struct Kinks {
  Eigen::VectorXd slope{};  ///< n, the jump of the slope, 0 for none; a jump of the value counts as
                            ///< the slope it makes over the smallest step
  Mask of_value{};          ///< n, the value jumps

  [[nodiscard]] static Kinks none(Eigen::Index n) {
    return {Eigen::VectorXd::Zero(n), Mask::Constant(n, false)};
  }
  [[nodiscard]] bool any() const {
    for (Eigen::Index i = 0; i < slope.size(); ++i) {
      if (slope(i) > 0.0) return true;
    }
    return false;
  }
};

/// The kinks that the smallest pairs make suspect.
/// @param noise    the noise of each element
/// @param certain  its level is no mere bound: else the fit's own scatter is believed where it is
///   less, for a kink passes for noise
[[nodiscard]] inline Kinks suspected_kinks(const Readings& readings, const Windows& windows,
                                           const NoiseFloor& noise, bool certain) {
  const Eigen::Index n = readings.elements();
  Kinks kinks = Kinks::none(n);
  std::vector<Rung> pairs;
  std::vector<double> steps;
  for (const Rung& rung : windows.rungs_of(0)) {
    if (rung.paired() && pairs.size() < 4) pairs.push_back(rung), steps.push_back(rung.step);
  }
  if (pairs.size() < 2) return kinks;
  const auto count = static_cast<Eigen::Index>(pairs.size());
  const double steady = count == 2 ? 10.0 : n > 1 ? 6.0 : 4.0;

  // The even part has a kink or a jump, the odd part a jump.
  struct Term {
    SingularFit fit;
    bool even;
    int power;
    double least;
  };
  const std::array<Term, 3> terms{Term{singular_fit(steps, 1, 2), true, 1, 0.15},
                                  Term{singular_fit(steps, 0, 2), true, 0, 0.4},
                                  Term{singular_fit(steps, 0, 1), false, 0, 0.4}};
  Eigen::VectorXd even(count), odd(count), growth(count);
  for (Eigen::Index i = 0; i < n; ++i) {
    const Eigen::VectorXd growths = readings.growths_of(i);
    for (Eigen::Index k = 0; k < count; ++k) {
      const Rung& rung = pairs[static_cast<std::size_t>(k)];
      const double plus = readings.values(i, rung.plus) - readings.origin(i);
      const double minus = readings.values(i, rung.minus) - readings.origin(i);
      even(k) = plus + minus;
      odd(k) = plus - minus;
      growth(k) =
          growths(rung.plus) * growths(rung.plus) + growths(rung.minus) * growths(rung.minus);
    }
    // A value that jumps belongs to one side: the other is displaced in both parts alike. In the
    // even part alone it is the fiducial value that is off, by a draw of noise that all pairs
    // share; the differences of pairs do without it.
    const double displaced = std::abs(terms[2].fit.weights.dot(odd));
    double least_unsteady = std::numeric_limits<double>::infinity();
    for (const Term& term : terms) {
      const Eigen::VectorXd& part = term.even ? even : odd;
      const Eigen::VectorXd& w = term.fit.weights;
      const double size = w.dot(part), change = size - term.fit.previous.dot(part);
      // Of its noise in units of the level: that of a pair grows with its values.
      const auto norm = [&](const Eigen::VectorXd& v) {
        double sum = 0.0, squares = 0.0;
        for (Eigen::Index k = 0; k < count; ++k) sum += v(k), squares += v(k) * v(k) * growth(k);
        return std::sqrt(squares + (term.even ? 4.0 * sum * sum : 0.0));
      };
      double level = noise.level(i);
      if (!certain && !noise.rounded(i)) {
        level = std::min(level, std::abs(change) / norm(term.fit.change));
      }
      level =
          std::max(level, std::numeric_limits<double>::epsilon() * std::abs(readings.origin(i)));
      const double share = size * std::pow(steps[0], term.power) / part(0);
      if (std::abs(size) > steady * std::abs(change) && std::abs(size) > 6.0 * level * norm(w) &&
          share > term.least && share < 2.0) {
        const double unsteady = std::abs(change / size);
        if (unsteady >= least_unsteady) continue;  // the term that fits best
        least_unsteady = unsteady;
        const bool one_sided = displaced > 0.5 * std::abs(size) && displaced < 2.0 * std::abs(size);
        kinks.slope(i) = term.power == 1           ? std::abs(size)
                         : term.even && !one_sided ? 0.0
                                                   : std::abs(size) / steps[0];
        kinks.of_value(i) = term.power == 0;
      }
    }
  }
  return kinks;
}

}  // namespace whet::detail

#pragma once
/// Two pairs very near the fiducial point, which tell noise from structure and settle a kink.

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/derivatives/kink.hpp>
#include <whet/derivatives/noise_floor.hpp>
#include <whet/derivatives/readings.hpp>

namespace whet::detail {

/// What an audit says of one element.
enum class Finding {
  white_noise,  ///< noise at every step: its level is known now
  correlated,   ///< smooth nearby, but for steps or jitter: the level stands
  structure,    ///< smooth nearby, and what looked like noise is structure that needs small steps
  none,         ///< smooth nearby, with the slope of the ladder: no noise of that level
};

/// The steps of an audit below the smallest step of the ladder.
inline constexpr std::array<double, 2> audit_parts{1.0 / 64.0, 1.0 / 65536.0};

/// A straight line fitted through the audit points and the fiducial one: the spread about it.
struct AuditSpread {
  double slope{};
  double spread{};     ///< standard deviation about the line
  double innermost{};  ///< second difference of the smallest step over its norm
};

[[nodiscard]] inline AuditSpread audit_spread(const std::vector<double>& t,
                                              const Eigen::VectorXd& change) {
  // The outer points fix the slope; intercept and slope by least squares over all and (0, 0).
  const auto count = static_cast<double>(t.size() + 1);
  double sum_t = 0.0, sum_tt = 0.0, sum_d = 0.0, sum_td = 0.0;
  for (std::size_t k = 0; k < t.size(); ++k) {
    const double d = change(static_cast<Eigen::Index>(k));
    sum_t += t[k], sum_tt += t[k] * t[k], sum_d += d, sum_td += t[k] * d;
  }
  AuditSpread result;
  const double determinant = count * sum_tt - sum_t * sum_t;
  result.slope = (count * sum_td - sum_t * sum_d) / determinant;
  const double intercept = (sum_d - result.slope * sum_t) / count;
  double sum = intercept * intercept;
  for (std::size_t k = 0; k < t.size(); ++k) {
    const double off = change(static_cast<Eigen::Index>(k)) - intercept - result.slope * t[k];
    sum += off * off;
  }
  result.spread = std::sqrt(sum / std::max(1.0, count - 2.0));
  // The two nearest points and the fiducial one.
  std::vector<std::size_t> order(t.size());
  for (std::size_t k = 0; k < t.size(); ++k) order[k] = k;
  std::sort(order.begin(), order.end(),
            [&](std::size_t a, std::size_t b) { return std::abs(t[a]) < std::abs(t[b]); });
  if (t.size() >= 2) {
    const std::size_t a = order[0], b = order[1];
    const std::vector<double> three{t[a], t[b], 0.0};
    const Eigen::VectorXd c = difference_weights(three);
    result.innermost = std::abs(c(0) * change(static_cast<Eigen::Index>(a)) +
                                c(1) * change(static_cast<Eigen::Index>(b))) /
                       c.norm();
  }
  return result;
}

/// Noise up to here may be the rounding of the arithmetic, of values and of arguments.
[[nodiscard]] inline double most_rounding(double value, double fiducial, double slope) {
  constexpr double operations = 100.0;  // whose rounding adds up
  return operations * std::numeric_limits<double>::epsilon() *
         (std::abs(value) + std::abs(fiducial * slope));
}

/// Judge one element.
/// @param audit     readings at the audit points
/// @param level     the noise level it was thought to have
/// @param slope     its derivative, so far
/// @param claim     what noise of that level would do to the derivative
/// @param bounds    gets the level where the noise is white
[[nodiscard]] inline Finding judge_audit(const Readings& audit, Eigen::Index i, double level,
                                         double fiducial, double slope, double claim,
                                         NoiseBounds& bounds) {
  const Eigen::VectorXd change = audit.changes_of(i);
  const AuditSpread spread = audit_spread(audit.displacements, change);
  const double size = std::abs(audit.origin(i));
  const double rounding = most_rounding(size, fiducial, slope);
  const bool real = spread.innermost > rounding && spread.innermost > 0.1 * spread.spread;
  if (spread.innermost > 0.05 * level || real) {
    bounds.least(i) = 1.6 * spread.spread;
    bounds.most(i) = 2.4 * spread.spread;
    return Finding::white_noise;
  }
  double nearest = std::numeric_limits<double>::infinity(), innermost = 0.0;
  for (Eigen::Index k = 0; k < audit.count(); ++k) {
    const double t = std::abs(audit.displacements[static_cast<std::size_t>(k)]);
    if (t < nearest) nearest = t, innermost = std::abs(change(k));
  }
  if (level > 5e-3 * size || innermost > 9.0 * level) return Finding::structure;
  // Steps or jitter would be seen in a slope over so short a way.
  return std::abs(spread.slope - slope) < 5e-3 * claim ? Finding::none : Finding::correlated;
}

/// The noise that an audit sees in the elements which are not suspected of a kink: a kink of few
/// elements must stand above it.
struct CrowdNoise {
  double relative{}, absolute{};  ///< 0 where every element is suspected

  /// As elements may be alike in either, the larger.
  [[nodiscard]] double at(double value) const {
    return std::max(relative * std::abs(value), absolute);
  }
};

[[nodiscard]] inline CrowdNoise crowd_noise(const Readings& audit, const Kinks& suspected) {
  std::vector<double> relative, absolute;
  for (Eigen::Index i = 0; i < audit.elements(); ++i) {
    if (suspected.slope(i) > 0.0) continue;
    const double draw = audit_spread(audit.displacements, audit.changes_of(i)).innermost;
    absolute.push_back(draw);
    if (audit.origin(i) != 0.0) relative.push_back(draw / std::abs(audit.origin(i)));
  }
  return {lower_median(std::move(relative)), lower_median(std::move(absolute))};
}

/// Does an audit confirm (1) or refute (-1) a kink that the ladder suspects? 0: it cannot tell.
/// @param crowd   the noise of elements beside it
/// @param bottom  the smallest step of the ladder, over which a jump of the value makes the slope
[[nodiscard]] inline int settle_kink(const Readings& audit, Eigen::Index i, double level,
                                     double crowd, const Kinks& suspected, double bottom) {
  constexpr double certain = 6.0;  // standard deviations: no chance among many elements
  // Changes at + and - the outer step, then the inner one.
  if (audit.count() != 4 || audit.displacements[0] * audit.displacements[1] > 0.0) return 0;
  const Eigen::VectorXd change = audit.changes_of(i);
  if (suspected.of_value(i)) {  // a side that has jumped is displaced alike at both steps
    const double height = suspected.slope(i) * bottom;
    for (const Eigen::Index side : {0, 1}) {
      const double far = change(side), near = change(side + 2), other = change(3 - side);
      if (std::abs(near) > std::max(0.3 * height, certain * crowd) &&
          std::abs(near) < 1.2 * height && std::abs(other) < 0.3 * std::abs(near) &&
          std::abs(far - near) < 0.05 * std::abs(near)) {
        return 1;
      }
    }
    return change.lpNorm<Eigen::Infinity>() < 0.3 * height ? -1 : 0;
  }
  const double jump = suspected.slope(i), step = std::abs(audit.displacements[0]);
  const double outer = std::abs(change(0) + change(1)) / step;
  const double inner = std::abs(change(2) + change(3)) / std::abs(audit.displacements[2]);
  // A second difference has the norm sqrt(1 + 1 + 4).
  const bool seen = inner * std::abs(audit.displacements[2]) > certain * std::sqrt(6.0) * crowd;
  const bool steady = outer < 4.0 * inner && inner < 4.0 * outer;
  if (seen && steady && std::min(outer, inner) > 0.03 * jump) return 1;
  return outer + 6.0 * level / step < 0.2 * jump ? -1 : 0;
}

}  // namespace whet::detail

#pragma once
/// Levels of confidence and the ellipses that belong to them.

#include <cmath>
#include <numbers>

#include <whet/support/error.hpp>

namespace whet {

/// A level of confidence of the joint distribution of two parameters.
class Confidence {
 public:
  /// The region that holds this probability, 0 < probability < 1.
  /// @throws ParameterError outside of that
  [[nodiscard]] static Confidence probability(double probability) {
    if (!(probability > 0.0 && probability < 1.0)) {
      detail::fail<ParameterError>({.where = "Confidence::probability",
                                    .what = "probability",
                                    .got = detail::text(probability),
                                    .expected = "a value between 0 and 1"});
    }
    return Confidence(-2.0 * std::log1p(-probability));  // chi^2 of two degrees of freedom
  }

  /// The difference of chi^2 on the edge of the region.
  [[nodiscard]] double delta_chi_squared() const noexcept { return delta_chi_squared_; }

 private:
  explicit Confidence(double delta_chi_squared) : delta_chi_squared_(delta_chi_squared) {}
  double delta_chi_squared_;
};

/// The confidence ellipse of two parameters, x and y, all others integrated out. Semi-axes and
/// angle mean something where both have one unit, or none; the area is in unit of x times unit of
/// y.
struct Ellipse {
  double centre_x{}, centre_y{};      ///< the fiducial values
  double semi_major{}, semi_minor{};  ///< lengths of the semi-axes
  double angle{};  ///< of the major axis from the x axis, radians, in (-pi/2, pi/2]

  [[nodiscard]] double area() const noexcept { return std::numbers::pi * semi_major * semi_minor; }
};

namespace detail {

/// The ellipse x = h t, |t|^2 <= level, for C = h h^T given by its lower-triangular root
/// [[l11, 0], [l21, l22]]: by the singular values of h, never by the difference of eigenvalues.
[[nodiscard]] inline Ellipse ellipse_of(double l11, double l21, double l22, double level) {
  const double sum = std::hypot(l11 + l22, l21);         // s1 + s2
  const double difference = std::hypot(l11 - l22, l21);  // s1 - s2
  const double major = 0.5 * (sum + difference);
  const double minor = major > 0.0 ? std::abs(l11 * l22) / major : 0.0;  // s1 s2 = |det|
  const double scale = std::sqrt(level);
  const double angle = 0.5 * std::atan2(2.0 * l11 * l21, l11 * l11 - l21 * l21 - l22 * l22);
  return {0.0, 0.0, scale * major, scale * minor, angle};
}

}  // namespace detail
}  // namespace whet

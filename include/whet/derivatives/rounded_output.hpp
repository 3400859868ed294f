#pragma once
/// Does a code print a few digits only? Found from the values alone.

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>

#include <Eigen/Core>

namespace whet::detail {

/// 10^k, right to the last places for |k| <= 22, which covers the digits of a double.
[[nodiscard]] inline double power_of_ten(int k) {
  static constexpr std::array<double, 23> exact{1e0,  1e1,  1e2,  1e3,  1e4,  1e5,  1e6,  1e7,
                                                1e8,  1e9,  1e10, 1e11, 1e12, 1e13, 1e14, 1e15,
                                                1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22};
  const int size = std::abs(k);
  const double power = size <= 22 ? exact[static_cast<std::size_t>(size)] : std::pow(10.0, size);
  return k < 0 ? 1.0 / power : power;
}

/// The exponent of the first significant digit: 2 for 123.4.
[[nodiscard]] inline int decimal_exponent(double value) {
  return static_cast<int>(std::floor(std::log10(std::abs(value)) * (1.0 + 1e-15) + 1e-15));
}

/// Significant decimal digits that reproduce a value, at least `least`; above `most`: most + 1.
[[nodiscard]] inline int digits_needed(double value, int least, int most) {
  if (value == 0.0) return least;
  const int exponent = decimal_exponent(value);
  for (int digits = least; digits <= most; ++digits) {
    // Scaled so that the last digit kept is a unit: a whole number, but for the rounding of both.
    const double scaled = value * power_of_ten(digits - 1 - exponent);
    if (std::abs(scaled - std::nearbyint(scaled)) <= 8e-16 * std::abs(scaled)) return digits;
  }
  return most + 1;
}

/// The quantum of rounded output at the fiducial value, or 0 where the values are not rounded.
/// @param origin  the value at the fiducial point
/// @param values  the values elsewhere
[[nodiscard]] inline double rounding_quantum(double origin, const Eigen::VectorXd& values) {
  constexpr int most = 11;
  const Eigen::Index count = values.size();
  if (origin == 0.0 || count < 2) return 0.0;
  Eigen::Index ties = 0, different = 1;
  bool single = static_cast<double>(static_cast<float>(origin)) == origin;
  int digits = digits_needed(origin, 1, most);
  for (Eigen::Index k = 0; k < count && (single || digits <= most); ++k) {
    const double value = values(k);
    const double* const before = values.data() + k;
    if (value == origin || std::find(values.data(), before, value) != before) {  // a tie
      ++ties;
      continue;
    }
    ++different;
    single = single && static_cast<double>(static_cast<float>(value)) == value;
    if (digits <= most) digits = digits_needed(value, digits, most);
  }
  if (ties == 0 && different < 3) return 0.0;
  const bool all_equal = different == 1;
  if (digits >= 3 && digits <= (all_equal ? 8 : most)) {
    return power_of_ten(decimal_exponent(origin) - digits + 1);
  }
  // Single precision: 24 binary digits. Equal values tell too little.
  if (single && !all_equal) return std::ldexp(1.0, std::ilogb(origin) - 23);
  return 0.0;
}

}  // namespace whet::detail

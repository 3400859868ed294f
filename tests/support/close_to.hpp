#pragma once
/// Relative comparison for tests: doctest's own adds a scale of one and passes 1e-8 for 5e-8.

#include <cmath>
#include <ostream>

namespace whet::test {

struct CloseTo {
  double value;
  double relative;
  /// |got - value| <= relative |value|; a value of zero, an infinity or a NaN must be met exactly.
  friend bool operator==(double got, const CloseTo& expected) {
    if (std::isinf(expected.value)) return got == expected.value;
    return std::abs(got - expected.value) <= expected.relative * std::abs(expected.value);
  }
  friend std::ostream& operator<<(std::ostream& out, const CloseTo& expected) {
    const auto digits = out.precision(17);
    out << expected.value << " to " << expected.relative;
    out.precision(digits);
    return out;
  }
};

[[nodiscard]] inline CloseTo close_to(double value, double relative) { return {value, relative}; }

}  // namespace whet::test

#include <whet/derivatives/dual_branches.hpp>

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>

#include <doctest/doctest.h>

#include <support/close_to.hpp>

using whet::Dual;
using whet::test::close_to;
using One = Dual<double, 1>;
using Two = Dual<double, 2>;

TEST_CASE("An absolute value takes the sign of its argument along") {
  CHECK(abs(One::variable(-3.0, 0)).value() == 3.0);
  CHECK(abs(One::variable(-3.0, 0)).gradient()[0] == -1.0);
  CHECK(fabs(One::variable(3.0, 0)).gradient()[0] == 1.0);
  CHECK(std::abs(abs(One::variable(0.0, 0)).gradient()[0]) == 1.0);  // one branch, in silence
  CHECK(!std::signbit(abs(One(-0.0)).value()));
}

TEST_CASE("Minimum and maximum are one of their arguments with its gradient") {
  const Two x = Two::variable(1.0, 0), y = Two::variable(2.0, 1);
  CHECK(fmax(x, y).gradient() == std::array{0.0, 1.0});
  CHECK(fmin(x, y).gradient() == std::array{1.0, 0.0});
  CHECK(std::max(x, y).gradient() == std::array{0.0, 1.0});
  CHECK(std::min(x, y).gradient() == std::array{1.0, 0.0});
  const Two missing(std::numeric_limits<double>::quiet_NaN());
  CHECK(fmax(missing, y).value() == 2.0);  // as std::fmax
  CHECK(fmin(x, missing).value() == 1.0);
}

TEST_CASE("A remainder moves with the dividend and against the divisor") {
  const Two x = Two::variable(7.5, 0), y = Two::variable(2.0, 1);
  CHECK(fmod(x, y).value() == 1.5);
  CHECK(fmod(x, y).gradient() == std::array{1.0, -3.0});  // 7.5 - 3 * 2
  CHECK(fmod(-x, y).gradient() == std::array{-1.0, 3.0});
  CHECK(fmod(x, 2).gradient() == std::array{1.0, 0.0});
  // 0.9 is below 9 * 0.1 in binary, though the quotient rounds to 9: n is 8, as std::fmod has it.
  CHECK(fmod(Two(0.9), Two::variable(0.1, 1)).gradient()[1] == -8.0);
}

TEST_CASE("Steps are flat") {
  const One x = One::variable(-2.6, 0);
  CHECK(floor(x).value() == -3.0);
  CHECK(ceil(x).value() == -2.0);
  CHECK(round(x).value() == -3.0);
  CHECK(trunc(x).value() == -2.0);
  for (const One& step : {floor(x), ceil(x), round(x), trunc(x)}) CHECK(step.gradient()[0] == 0.0);
}

TEST_CASE("A copied sign turns the gradient with the value") {
  const One x = One::variable(-2.0, 0);
  CHECK(copysign(x, 1.0).value() == 2.0);
  CHECK(copysign(x, 1.0).gradient()[0] == -1.0);
  CHECK(copysign(x, -0.0).gradient()[0] == 1.0);
  CHECK(copysign(3.0, x).value() == -3.0);
  CHECK(copysign(3.0, x).gradient()[0] == 0.0);
}

TEST_CASE("Branches work on dual numbers of dual numbers") {
  using Twice = Dual<One, 1>;
  const Twice x = Twice::variable(One::variable(-3.0, 0), 0);
  const Twice cube = abs(x * x * x);  // -x^3 here: derivatives -3 x^2, -6 x
  CHECK(cube.value().value() == 27.0);
  CHECK(cube.gradient()[0].value() == -27.0);
  CHECK(cube.gradient()[0].gradient()[0] == 18.0);
  CHECK(fmod(x * x, 4.0).gradient()[0].gradient()[0] == 2.0);
}

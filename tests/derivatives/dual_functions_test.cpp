#include <whet/derivatives/dual_functions.hpp>

#include <cmath>
#include <limits>
#include <string>
#include <vector>

#include <doctest/doctest.h>
#include <boost/math/differentiation/finite_difference.hpp>
#include <boost/multiprecision/cpp_bin_float.hpp>

#include <support/close_to.hpp>
#include <whet/derivatives/dual_branches.hpp>

using whet::Dual;
using whet::test::close_to;

namespace {

using Wide = boost::multiprecision::number<boost::multiprecision::cpp_bin_float<50>,
                                           boost::multiprecision::et_off>;
constexpr double infinity = std::numeric_limits<double>::infinity();

/// Differences of Boost.Math at 50 digits, good to some 40 of them. Its step takes the argument to
/// be of order one, so x is moved by a factor.
template <class F>
Wide difference(const F& f, const Wide& x) {
  const auto scaled = [&](const Wide& factor) { return f(Wide(x * factor)); };
  return boost::math::differentiation::finite_difference_derivative<decltype(scaled), Wide, 6>(
             scaled, Wide(1)) /
         x;
}

/// f, generic in its scalar, at each x: the value is that of the plain call, bit for bit; first and
/// second derivatives agree with differences of the 50-digit function and of its 50-digit dual.
template <class F>
void check(const char* name, const F& f, const std::vector<double>& points) {
  for (const double x : points) {
    CAPTURE(std::string(name));
    CAPTURE(x);
    const auto once = f(Dual<double, 1>::variable(x, 0));
    CHECK(once.value() == f(x));
    const Wide first = difference(f, Wide(x));
    CHECK(once.gradient()[0] == close_to(static_cast<double>(first), 1e-14));

    const auto slope = [&f](const Wide& at) {
      return f(Dual<Wide, 1>::variable(at, 0)).gradient()[0];
    };
    CHECK(static_cast<double>(slope(x) / first) == close_to(1.0, 1e-16));
    using Inner = Dual<double, 1>;
    const auto twice = f(Dual<Inner, 1>::variable(Inner::variable(x, 0), 0));
    CHECK(twice.value().value() == f(x));
    CHECK(twice.value().gradient()[0] == once.gradient()[0]);
    CHECK(twice.gradient()[0].value() == once.gradient()[0]);
    CHECK(twice.gradient()[0].gradient()[0] ==
          close_to(static_cast<double>(difference(slope, Wide(x))), 1e-13));
  }
}

/// The derivative of f at x, by x.
template <class F>
double slope(const F& f, double x) {
  return f(Dual<double, 1>::variable(x, 0)).gradient()[0];
}

}  // namespace

TEST_CASE("Exponentials and logarithms agree with differences at 50 digits, twice over") {
  const auto plain = {-3.7, 0.3, 2.25, 30.0};
  check(
      "exp",
      [](const auto& x) {
        using std::exp;
        return exp(x);
      },
      plain);
  check(
      "exp2",
      [](const auto& x) {
        using std::exp2;
        return exp2(x);
      },
      plain);
  check("expm1",
        [](const auto& x) {
          using std::expm1;
          return expm1(x);
        },
        {-40.0, -3.7, 1e-9, 2.0});
  check("log",
        [](const auto& x) {
          using std::log;
          return log(x);
        },
        {1e-100, 0.3, 1.0, 7e12});
  check("log2",
        [](const auto& x) {
          using std::log2;
          return log2(x);
        },
        {0.3, 7e12});
  check("log10",
        [](const auto& x) {
          using std::log10;
          return log10(x);
        },
        {0.3, 7e12});
  check("log1p",
        [](const auto& x) {
          using std::log1p;
          return log1p(x);
        },
        {-0.9, 1e-12, 5.0});
}

TEST_CASE("Roots and powers agree with differences at 50 digits, twice over") {
  check("sqrt",
        [](const auto& x) {
          using std::sqrt;
          return sqrt(x);
        },
        {1e-12, 0.7, 3e12});
  check("cbrt",
        [](const auto& x) {
          using std::cbrt;
          return cbrt(x);
        },
        {-8.1, 1e-12, 3e12});
  check("pow(x, 3)",
        [](const auto& x) {
          using std::pow;
          return pow(x, 3);
        },
        {-1.7, 0.2, 40.0});
  check("pow(x, -2)",
        [](const auto& x) {
          using std::pow;
          return pow(x, -2);
        },
        {-1.7, 0.2, 40.0});
  check("pow(x, 1.5)",
        [](const auto& x) {
          using std::pow;
          return pow(x, 1.5);
        },
        {0.2, 40.0});
  check("pow(1.5, x)",
        [](const auto& x) {
          using std::pow;
          return pow(1.5, x);
        },
        {-3.0, 0.2, 4.0});
  check("pow(x, x)",
        [](const auto& x) {
          using std::pow;
          return pow(x, x);
        },
        {0.2, 3.0});
  check("hypot(x, 2)",
        [](const auto& x) {
          using std::hypot;
          return hypot(x, decltype(x + x)(2));
        },
        {-1.5, 0.5, 5.0});
}

TEST_CASE("Circular functions and their inverses agree with differences at 50 digits, twice over") {
  const auto plain = {-2.0, 0.3, 1.2, 9.0};
  check(
      "sin",
      [](const auto& x) {
        using std::sin;
        return sin(x);
      },
      plain);
  check(
      "cos",
      [](const auto& x) {
        using std::cos;
        return cos(x);
      },
      plain);
  check(
      "tan",
      [](const auto& x) {
        using std::tan;
        return tan(x);
      },
      plain);
  check("asin",
        [](const auto& x) {
          using std::asin;
          return asin(x);
        },
        {-0.9, 0.2, 0.999});
  check("acos",
        [](const auto& x) {
          using std::acos;
          return acos(x);
        },
        {-0.9, 0.2, 0.999});
  check("atan",
        [](const auto& x) {
          using std::atan;
          return atan(x);
        },
        {-30.0, 0.2, 1.5});
  check("atan2(x, 2)",
        [](const auto& x) {
          using std::atan2;
          return atan2(x, decltype(x + x)(2));
        },
        {-3.0, 0.5});
  check("atan2(-1, x)",
        [](const auto& x) {
          using std::atan2;
          return atan2(decltype(x + x)(-1), x);
        },
        {-3.0, 0.5});
}

TEST_CASE(
    "Hyperbolic functions and their inverses agree with differences at 50 digits, twice over") {
  const auto plain = {-2.0, 0.3, 1.2, 15.0};
  check(
      "sinh",
      [](const auto& x) {
        using std::sinh;
        return sinh(x);
      },
      plain);
  check(
      "cosh",
      [](const auto& x) {
        using std::cosh;
        return cosh(x);
      },
      plain);
  check(
      "tanh",
      [](const auto& x) {
        using std::tanh;
        return tanh(x);
      },
      plain);
  check("asinh",
        [](const auto& x) {
          using std::asinh;
          return asinh(x);
        },
        {-30.0, 0.4, 1e6});
  check("acosh",
        [](const auto& x) {
          using std::acosh;
          return acosh(x);
        },
        {1.25, 30.0});
  check("atanh",
        [](const auto& x) {
          using std::atanh;
          return atanh(x);
        },
        {-0.9, 0.2, 0.99});
}

TEST_CASE("The error function agrees with differences at 50 digits, twice over") {
  check("erf",
        [](const auto& x) {
          using std::erf;
          return erf(x);
        },
        {-1.5, 0.2, 3.0});
  check("erfc",
        [](const auto& x) {
          using std::erfc;
          return erfc(x);
        },
        {-1.5, 0.2, 6.0});
}

TEST_CASE("Functions of several arguments carry the partial derivative of each") {
  using Two = Dual<double, 3>;
  const Two x = Two::variable(3.0, 0), y = Two::variable(-4.0, 1), z = Two::variable(12.0, 2);
  // Closed forms, by hand.
  const Two length = hypot(x, y);
  CHECK(length.value() == 5.0);
  CHECK(length.gradient() == std::array{0.6, -0.8, 0.0});
  const Two space = hypot(x, y, z);
  CHECK(space.value() == 13.0);
  CHECK(space.gradient()[0] == close_to(3.0 / 13.0, 1e-15));
  CHECK(space.gradient()[1] == close_to(-4.0 / 13.0, 1e-15));
  CHECK(space.gradient()[2] == close_to(12.0 / 13.0, 1e-15));
  const Two angle = atan2(y, x);
  CHECK(angle.value() == std::atan2(-4.0, 3.0));
  CHECK(angle.gradient()[0] == close_to(4.0 / 25.0, 1e-15));
  CHECK(angle.gradient()[1] == close_to(3.0 / 25.0, 1e-15));
  const Two power = pow(x, y);
  CHECK(power.value() == std::pow(3.0, -4.0));
  CHECK(power.gradient()[0] == close_to(-4.0 * std::pow(3.0, -5.0), 1e-15));
  CHECK(power.gradient()[1] == close_to(std::log(3.0) * std::pow(3.0, -4.0), 1e-15));
  const Two sum = fma(x, y, z);
  CHECK(sum.value() == 0.0);
  CHECK(sum.gradient() == std::array{-4.0, 3.0, 1.0});
}

TEST_CASE("Constants stand beside dual numbers in functions of several arguments") {
  const auto x = Dual<double, 1>::variable(3.0, 0);
  CHECK(hypot(x, 4.0).gradient()[0] == 0.6);
  CHECK(hypot(4, x).gradient()[0] == 0.6);
  CHECK(hypot(4.0, x, 0).gradient()[0] == 0.6);
  CHECK(fma(2.0, 5.0, x).value() == 13.0);
  CHECK(fma(2.0, x, 1).gradient()[0] == 2.0);
  CHECK(fmax(x, 4).gradient()[0] == 0.0);
  CHECK(fmin(4.0, x).gradient()[0] == 1.0);
}

TEST_CASE("Powers are right at a base of zero") {
  const auto power = [](auto p) { return [p](const auto& x) { return pow(x, p); }; };
  CHECK(slope(power(2), 0.0) == 0.0);
  CHECK(slope(power(2.0), 0.0) == 0.0);
  CHECK(slope(power(1), 0.0) == 1.0);
  CHECK(slope(power(1.0), 0.0) == 1.0);
  CHECK(slope(power(0), 0.0) == 0.0);
  CHECK(slope(power(0.0), 0.0) == 0.0);
  CHECK(slope(power(0.5), 0.0) == infinity);
  CHECK(slope(power(2u), -3.0) == -6.0);
  CHECK(slope([](const auto& y) { return pow(0.0, y); }, 2.0) == 0.0);
  CHECK(slope([](const auto& x) { return pow(x, Dual<double, 1>(2.0)); }, 0.0) == 0.0);
  CHECK(slope([](const auto& x) { return pow(x, Dual<double, 1>(3.0)); }, -2.0) == 12.0);
  CHECK(std::isnan(slope([](const auto& y) { return pow(-2.0, y); }, 2.0)));

  using Inner = Dual<double, 1>;
  const auto zero = Dual<Inner, 1>::variable(Inner::variable(0.0, 0), 0);
  CHECK(pow(zero, 2).gradient()[0].gradient()[0] == 2.0);
  CHECK(pow(zero, 1).gradient()[0].gradient()[0] == 0.0);
  CHECK(pow(zero, 3.0).gradient()[0].gradient()[0] == 0.0);
}

TEST_CASE("An infinite slope is infinite for what moves, and nothing for what does not") {
  using Two = Dual<double, 2>;
  const Two x = Two::variable(0.0, 0);
  for (const Two& root : {sqrt(x), cbrt(x), pow(x, 0.3)}) {
    CHECK(root.value() == 0.0);
    CHECK(root.gradient() == std::array{infinity, 0.0});
  }
  CHECK(sqrt(Two(0.0)).gradient() == std::array{0.0, 0.0});
  CHECK(sqrt(0.0 * x).gradient() == std::array{0.0, 0.0});  // no x moves it
  CHECK(hypot(Two(0.0), Two(0.0)).gradient() == std::array{0.0, 0.0});
  CHECK(hypot(x, Two(0.0), Two(1.0)).gradient() == std::array{0.0, 0.0});
  CHECK(std::isnan(hypot(x, Two(0.0)).gradient()[0]));  // |x| has none at 0
}

TEST_CASE("Slopes keep their digits in the tails") {
  // Closed forms in double: sech^2(20) = 4 e^-40 to one part in 1e17, 1/1e200.
  CHECK(slope([](const auto& x) { return tanh(x); }, 20.0) == close_to(4 * std::exp(-40.0), 1e-15));
  CHECK(slope([](const auto& x) { return asinh(x); }, 1e200) == close_to(1e-200, 1e-15));
  CHECK(slope([](const auto& x) { return hypot(x, x); }, 1e300) == close_to(std::sqrt(2.0), 1e-15));
  CHECK(slope([](const auto& x) { return pow(x, 2); }, 1e-200) == close_to(2e-200, 1e-15));
}

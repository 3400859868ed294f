#include <whet/derivatives/dual_gamma.hpp>

#include <cmath>

#include <doctest/doctest.h>
#include <boost/math/constants/constants.hpp>

#include <support/close_to.hpp>

using whet::Dual;
using whet::test::close_to;

TEST_CASE("The gamma function and its logarithm have their closed derivatives at 1 and 1/2") {
  const double euler = boost::math::constants::euler<double>();
  const double pi = boost::math::constants::pi<double>();
  const auto one = Dual<double, 1>::variable(1.0, 0), half = Dual<double, 1>::variable(0.5, 0);
  // psi(1) = -gamma, psi(1/2) = -gamma - 2 ln 2 (Abramowitz & Stegun 1964, 6.3.2, 6.3.3).
  CHECK(lgamma(one).gradient()[0] == close_to(-euler, 1e-15));
  CHECK(tgamma(one).gradient()[0] == close_to(-euler, 1e-15));
  CHECK(lgamma(half).gradient()[0] == close_to(-euler - 2 * std::log(2.0), 1e-15));
  CHECK(tgamma(half).gradient()[0] ==
        close_to(-std::sqrt(pi) * (euler + 2 * std::log(2.0)), 1e-14));
  CHECK(lgamma(half).value() == std::lgamma(0.5));
  CHECK(tgamma(half).value() == std::tgamma(0.5));
}

TEST_CASE("The recurrence of the gamma function holds for its derivatives, left of zero too") {
  for (const double x : {-2.3, 0.1, 4.7, 60.0}) {
    CAPTURE(x);
    const auto at = Dual<double, 1>::variable(x, 0);
    // d/dx ln |x Gamma(x)| = d/dx ln |Gamma(x + 1)|
    CHECK(lgamma(at).gradient()[0] + 1 / x == close_to(lgamma(at + 1.0).gradient()[0], 1e-13));
    CHECK((at * tgamma(at)).gradient()[0] == close_to(tgamma(at + 1.0).gradient()[0], 1e-13));
  }
}

TEST_CASE("The second derivative of ln Gamma at 1 is pi^2 / 6") {
  using Inner = Dual<double, 1>;
  const auto one = Dual<Inner, 1>::variable(Inner::variable(1.0, 0), 0);
  const double pi = boost::math::constants::pi<double>();
  // Abramowitz & Stegun (1964), 6.4.2.
  CHECK(lgamma(one).gradient()[0].gradient()[0] == close_to(pi * pi / 6, 1e-15));
}

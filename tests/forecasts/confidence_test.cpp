#include <whet/forecasts/confidence.hpp>

#include <cmath>
#include <numbers>

#include <doctest/doctest.h>

#include <support/close_to.hpp>

using whet::Confidence;
using whet::Ellipse;
using whet::ParameterError;
using whet::test::close_to;

TEST_CASE("Delta chi^2 of two parameters, at the levels in use") {
  // -2 ln(1 - p): computed at 50 digits (mpmath), 14 digits given. k sigma means p = erf(k/sqrt 2).
  const auto level = [](double p) { return Confidence::probability(p).delta_chi_squared(); };
  const double root = std::numbers::sqrt2;
  CHECK(level(std::erf(1.0 / root)) == close_to(2.2957489288986, 3e-14));
  CHECK(level(std::erf(2.0 / root)) == close_to(6.1800743062442, 3e-14));
  CHECK(level(std::erf(3.0 / root)) == close_to(11.829158081901, 2e-13));  // 1 - p loses digits
  CHECK(level(0.90) == close_to(4.6051701859881, 3e-14));
  CHECK(level(0.95) == close_to(5.9914645471080, 3e-14));
  CHECK(level(0.99) == close_to(9.2103403719762, 3e-14));
  CHECK(level(0.9999) == close_to(18.420680743952, 2e-13));
  // The literal probability is not erf(1/sqrt 2) beyond the fourth digit.
  CHECK(level(0.6827) == close_to(2.2958151607860, 3e-14));
  CHECK(level(1e-12) == close_to(2e-12, 1e-11));
}

TEST_CASE("Ellipses of three covariances") {
  // Semi-axes, angle, area: computed at 50 digits (mpmath), confirmed by an eigen-decomposition.
  struct Row {
    double c11, c12, c22, probability, major, minor, angle, area;
  };
  const Row rows[] = {{4.0, 1.5, 2.0, std::erf(1.0 / std::numbers::sqrt2), 3.32053715926560,
                       1.65786807295639, 0.491396861623665, 17.2945069580188},
                      {0.01, -0.03, 0.16, std::erf(2.0 / std::numbers::sqrt2), 1.01218431914483,
                       0.161541128319757, -1.38054313823871, 0.513679920352243},
                      {1.0, 0.5, 1.0, 0.95, 2.99786537734135, 1.73081838260229, 0.785398163397448,
                       16.3009718795645}};
  for (const Row& row : rows) {
    const double l11 = std::sqrt(row.c11), l21 = row.c12 / l11,
                 l22 = std::sqrt(row.c22 - l21 * l21);
    const Ellipse ellipse = whet::detail::ellipse_of(
        l11, l21, l22, Confidence::probability(row.probability).delta_chi_squared());
    CHECK(ellipse.semi_major == close_to(row.major, 3e-14));
    CHECK(ellipse.semi_minor == close_to(row.minor, 3e-14));
    CHECK(ellipse.angle == close_to(row.angle, 1e-14));
    CHECK(ellipse.area() == close_to(row.area, 3e-14));
  }
}

TEST_CASE("A needle keeps its width, where a difference of eigenvalues has none") {
  // C = [[1, 1], [1, 1 + 1e-24]]: axes sqrt(2) and 1e-12 / sqrt(2), by hand to 1e-24.
  const Ellipse needle = whet::detail::ellipse_of(1.0, 1.0, 1e-12, 1.0);
  CHECK(needle.semi_major == close_to(std::numbers::sqrt2, 1e-15));
  CHECK(needle.semi_minor == close_to(1e-12 / std::numbers::sqrt2, 1e-15));
  CHECK(needle.angle == close_to(std::numbers::pi / 4.0, 1e-15));
}

TEST_CASE("A probability outside of zero to one is refused") {
  for (const double p : {0.0, 1.0, -0.5, 95.0, std::nan("")}) {
    CHECK_THROWS_WITH_AS((void)Confidence::probability(p),
                         doctest::Contains("expected a value between 0 and 1"), ParameterError);
  }
}

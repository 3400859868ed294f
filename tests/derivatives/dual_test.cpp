#include <whet/derivatives/dual.hpp>

#include <algorithm>
#include <array>
#include <cmath>
#include <compare>
#include <limits>
#include <sstream>
#include <type_traits>
#include <vector>

#include <doctest/doctest.h>
#include <Eigen/LU>
#include <boost/math/quadrature/gauss.hpp>
#include <boost/math/quadrature/gauss_kronrod.hpp>
#include <boost/multiprecision/cpp_bin_float.hpp>

#include <support/close_to.hpp>
#include <whet/derivatives/dual_branches.hpp>
#include <whet/derivatives/dual_functions.hpp>

using whet::Dual;
using whet::test::close_to;
using One = Dual<double, 1>;
using Two = Dual<double, 2>;
using Twice = Dual<One, 1>;
using Wide = boost::multiprecision::number<boost::multiprecision::cpp_bin_float<50>,
                                           boost::multiprecision::et_off>;

namespace {

/// The variable of a function of one argument whose second derivative is wanted.
Twice variable(double x) { return Twice::variable(One::variable(x, 0), 0); }

}  // namespace

TEST_CASE("Sum, product and quotient follow the rules of differentiation") {
  const Two x = Two::variable(3.0, 0), y = Two::variable(4.0, 1);
  // By hand, exact in binary.
  CHECK((x + y).value() == 7.0);
  CHECK((x + y).gradient() == std::array{1.0, 1.0});
  CHECK((x - y).gradient() == std::array{1.0, -1.0});
  CHECK((x * y).gradient() == std::array{4.0, 3.0});
  CHECK((x / y).value() == 0.75);
  CHECK((x / y).gradient() == std::array{0.25, -0.1875});
  CHECK((-x).gradient() == std::array{-1.0, 0.0});
  CHECK((+x).gradient() == std::array{1.0, 0.0});
}

TEST_CASE("Constants of any arithmetic type stand on either side") {
  const One x = One::variable(4.0, 0);
  CHECK((2 + x).value() == 6.0);
  CHECK((x - 1.5f).value() == 2.5);
  CHECK((3u - x).value() == -1.0);
  CHECK((3u - x).gradient()[0] == -1.0);
  CHECK((2.0 * x).gradient()[0] == 2.0);
  CHECK((x * 2l).gradient()[0] == 2.0);
  CHECK((x / 2).gradient()[0] == 0.5);
  CHECK((8 / x).value() == 2.0);
  CHECK((8 / x).gradient()[0] == -0.5);
  One y = x;
  y += 1, y -= 2.0, y *= 3, y /= 9.0;
  CHECK(y.value() == 1.0);
  CHECK(y.gradient()[0] == 3.0 / 9.0);
  const One chosen = true ? x : One(0.0);
  CHECK(chosen.gradient()[0] == 1.0);
}

TEST_CASE("A number may be combined with itself in place") {
  One x = One::variable(3.0, 0);
  const One& same = x;
  x *= same;
  CHECK(x.value() == 9.0);
  CHECK(x.gradient()[0] == 6.0);
  x /= same;
  CHECK(x.value() == 1.0);
  CHECK(x.gradient()[0] == 0.0);
  x = One::variable(3.0, 0);
  x -= same;
  CHECK(x.gradient()[0] == 0.0);
}

TEST_CASE("A constant has no gradient, and a default dual number is zero") {
  CHECK(Two().value() == 0.0);
  CHECK(Two().gradient() == std::array{0.0, 0.0});
  CHECK(Two(7).value() == 7.0);
  CHECK(Two(7).gradient() == std::array{0.0, 0.0});
}

TEST_CASE("A dual number does not turn into a plain one, nor a string into a dual one") {
  static_assert(!std::is_convertible_v<One, double>);
  static_assert(!std::is_constructible_v<double, One>);
  static_assert(!std::is_constructible_v<One, const char*>);
  static_assert(!std::is_constructible_v<One, Two>);
  static_assert(std::is_convertible_v<double, Twice> && std::is_convertible_v<One, Twice>);
}

TEST_CASE("Comparisons are by value, and nothing compares with a NaN") {
  const Two x = Two::variable(1.0, 0), y = Two::variable(1.0, 1);
  CHECK(x == y);
  CHECK(x <= y);
  CHECK(!(x < y));
  CHECK(x < 2);
  CHECK(0.5 < x);
  CHECK(1 == x);
  CHECK(x != 3.0);
  const Two missing(std::numeric_limits<double>::quiet_NaN());
  CHECK(!(missing < x));
  CHECK(!(missing >= x));
  CHECK(!(missing == missing));
  CHECK(isnan(missing));
  CHECK(!isfinite(missing));
  CHECK(isinf(Two(std::numeric_limits<double>::infinity())));
  CHECK(signbit(-x));
}

TEST_CASE("The limits are those of the value") {
  using Limits = std::numeric_limits<Two>;
  static_assert(Limits::is_specialized && Limits::digits == 53);
  CHECK(Limits::epsilon().value() == std::numeric_limits<double>::epsilon());
  CHECK(Limits::lowest().value() == std::numeric_limits<double>::lowest());
  CHECK(isinf(Limits::infinity()));
  CHECK(isnan(Limits::quiet_NaN()));
}

TEST_CASE("Dual numbers of dual numbers carry second derivatives") {
  const Twice x = variable(2.0);
  const Twice y = 1.0 / (x * x + 1) - x / 3;  // f'' = (6 x^2 - 2)/(x^2 + 1)^3
  CHECK(y.value().value() == close_to(0.2 - 2.0 / 3.0, 1e-15));
  CHECK(y.gradient()[0].value() == close_to(-4.0 / 25.0 - 1.0 / 3.0, 1e-15));
  CHECK(y.gradient()[0].gradient()[0] == close_to(22.0 / 125.0, 1e-15));
  // The inner number is a constant beside the outer one: d/dx by the outer direction alone.
  const Twice mixed = One::variable(2.0, 0) * x;
  CHECK(mixed.gradient()[0].value() == 2.0);
  CHECK(mixed.gradient()[0].gradient()[0] == 1.0);
}

TEST_CASE("A wide floating-point type keeps its digits in the derivative") {
  const auto x = Dual<Wide, 1>::variable(Wide(2), 0);
  const Wide got = (exp(3 * x) / x).gradient()[0];
  const Wide want = exp(Wide(6)) * (Wide(3) / 2 - Wide(1) / 4);
  CHECK(static_cast<double>(abs(got / want - 1)) < 1e-48);
  CHECK(x * 2 < 5.0);
}

TEST_CASE("Eigen's sums and products of dual numbers differentiate") {
  const Two x = Two::variable(2.0, 0), y = Two::variable(3.0, 1);
  Eigen::Matrix<Two, Eigen::Dynamic, 1> v(3);
  v << x, y, x * y;
  CHECK(v.dot(v).value() == 4.0 + 9.0 + 36.0);
  CHECK(v.squaredNorm().gradient() == std::array{2 * 2.0 + 2 * 6.0 * 3.0, 2 * 3.0 + 2 * 6.0 * 2.0});
  CHECK(v.sum().gradient() == std::array{4.0, 3.0});
  CHECK(v.norm().gradient()[0] == close_to(20.0 / 7.0, 1e-15));
  CHECK(v.maxCoeff().gradient() == std::array{3.0, 2.0});

  // With plain numbers on either side.
  const Eigen::MatrixXd plain{{1.0, 2.0, 0.5}, {0.0, -1.0, 4.0}};
  const Eigen::Matrix<Two, Eigen::Dynamic, 1> product = plain * v;
  CHECK(product(0).value() == 11.0);
  CHECK(product(0).gradient() == std::array{1.0 + 0.5 * 3.0, 2.0 + 0.5 * 2.0});
  CHECK(product(1).gradient() == std::array{12.0, 7.0});
  const Eigen::Matrix<Two, Eigen::Dynamic, 1> scaled = 2.0 * v + v * 3 - v / 2.0;
  CHECK(scaled(0).gradient() == std::array{4.5, 0.0});
  const Eigen::Vector3d weights(1.0, 10.0, 100.0);
  CHECK(weights.dot(v).gradient() == std::array{1.0 + 300.0, 10.0 + 200.0});
  const Eigen::Matrix<Two, Eigen::Dynamic, 1> spread = weights * x;
  CHECK(spread(2).gradient() == std::array{100.0, 0.0});
  const Eigen::Matrix<Two, 3, 1> weighted = (weights.array() * v.array()).matrix();
  CHECK(weighted(1).gradient() == std::array{0.0, 10.0});
}

TEST_CASE("Eigen solves a system of dual numbers, and the solution differentiates") {
  const Two x = Two::variable(2.0, 0), y = Two::variable(1.0, 1);
  Eigen::Matrix<Two, Eigen::Dynamic, Eigen::Dynamic> a(2, 2);
  a << 0.0, x, y, 3.0;  // needs a row exchange
  Eigen::Matrix<Two, Eigen::Dynamic, 1> b(2);
  b << 4.0, 10.0;
  const Eigen::Matrix<Two, Eigen::Dynamic, 1> solution = a.partialPivLu().solve(b);
  // By hand: s_1 = 4/x, s_0 = (10 - 12/x)/y.
  CHECK(solution(1).value() == 2.0);
  CHECK(solution(1).gradient() == std::array{-1.0, 0.0});
  CHECK(solution(0).value() == 4.0);
  CHECK(solution(0).gradient() == std::array{3.0, -4.0});
}

TEST_CASE("Quadrature by Gauss differentiates the integrand and the limits") {
  const Two a = Two::variable(1.3, 0), b = Two::variable(0.7, 1);
  const auto integrand = [&](const Two& t) { return exp(-a * t); };
  const Two got = boost::math::quadrature::gauss<Two, 15>::integrate(integrand, Two(0.0), b);
  // int_0^b exp(-a t) dt = (1 - e)/a, e = exp(-a b); by a: (b e a - (1 - e))/a^2; by b: e.
  const double e = std::exp(-1.3 * 0.7);
  CHECK(got.value() == close_to((1 - e) / 1.3, 1e-15));
  CHECK(got.gradient()[0] == close_to((0.7 * e * 1.3 - (1 - e)) / (1.3 * 1.3), 1e-14));
  CHECK(got.gradient()[1] == close_to(e, 1e-14));
}

TEST_CASE("Adaptive quadrature by Gauss and Kronrod differentiates the integrand") {
  const Two a = Two::variable(1.3, 0);
  const auto integrand = [&](const Two& t) { return exp(-a * t); };
  const Two whole = boost::math::quadrature::gauss_kronrod<Two, 15>::integrate(
      integrand, Two(0.0), std::numeric_limits<Two>::infinity(), 15, Two(1e-12));
  CHECK(whole.value() == close_to(1 / 1.3, 1e-12));
  CHECK(whole.gradient()[0] == close_to(-1 / (1.3 * 1.3), 1e-10));
}

TEST_CASE("A dual number prints as its value") {
  std::ostringstream out;
  out << Two::variable(2.5, 1) << ' ' << variable(-1.0);
  CHECK(out.str() == "2.5 -1");
}

TEST_CASE("Sorting and accumulating go by value and keep the gradients") {
  std::vector<Two> numbers{Two::variable(2.0, 0), Two::variable(1.0, 1)};
  std::sort(numbers.begin(), numbers.end());
  CHECK(numbers[0].gradient() == std::array{0.0, 1.0});
  CHECK(std::max(numbers[0], numbers[1]).gradient() == std::array{1.0, 0.0});
}

#include <whet/forecasts/forecast.hpp>

#include <algorithm>
#include <cmath>
#include <string>
#include <vector>

#include <doctest/doctest.h>

#include <whet/observables/exact.hpp>

#include <information/random_problems.hpp>
#include <support/close_to.hpp>

using whet::Confidence;
using whet::Forecast;
using whet::Information;
using whet::ParameterError;
using whet::Parameters;
using whet::test::close_to;
using whet::test::Draws;
using whet::test::information_of;
using whet::test::named;

namespace {

const Parameters abc{{"a", 2.0}, {"b", 0.5}, {"c", 1.0}};

Forecast base() {
  return Forecast(Information::from_matrix(
      abc, Eigen::Matrix3d{{20.0, 4.0, 3.0}, {4.0, 10.0, 2.0}, {3.0, 2.0, 5.0}}));
}

}  // namespace

TEST_CASE("The ellipse of two parameters is that of their covariance, about the fiducial values") {
  // Computed at 50 digits (mpmath): C = [[4, 1.5], [1.5, 2]] at p = erf(1/sqrt 2).
  const Forecast forecast(Information::from_covariance({{"x", 3.0}, {"y", -1.0}},
                                                       Eigen::Matrix2d{{4.0, 1.5}, {1.5, 2.0}}));
  const Confidence level = Confidence::probability(std::erf(1.0 / std::sqrt(2.0)));
  const whet::Ellipse ellipse = forecast.ellipse("x", "y", level);
  CHECK(ellipse.centre_x == 3.0);
  CHECK(ellipse.centre_y == -1.0);
  CHECK(ellipse.semi_major == close_to(3.32053715926560, 3e-14));
  CHECK(ellipse.semi_minor == close_to(1.65786807295639, 3e-14));
  CHECK(ellipse.angle == close_to(0.491396861623665, 1e-13));
  CHECK(forecast.figure_of_merit("x", "y") == close_to(0.417028828114150, 1e-14));
  CHECK(forecast.figure_of_merit("y", "x") == close_to(0.417028828114150, 1e-14));
  // Seen from the other side, the angle is the complement.
  CHECK(forecast.ellipse("y", "x", level).angle ==
        close_to(std::acos(-1.0) / 2.0 - 0.491396861623665, 1e-13));
}

TEST_CASE("A derived quantity has the variance g^T C g") {
  // q = a - 2 b + c / 2: computed at 50 digits (mpmath).
  const auto q = [](const auto& at) { return at["a"] - 2.0 * at["b"] + 0.5 * at["c"]; };
  CHECK(base().derived_sigma(whet::exact(q)) == close_to(0.827170191868511, 5e-15));
  const auto by_steps = [](const whet::Point<double>& at) {
    return at["a"] - 2.0 * at["b"] + 0.5 * at["c"];
  };
  CHECK(base().derived_sigma(by_steps) == close_to(0.827170191868511, 1e-9));
  // u = a b and v = a / b, as by a change of parameters.
  CHECK(base().derived_sigma(whet::exact([](const auto& at) { return at["a"] * at["b"]; })) ==
        close_to(0.659896703392182, 5e-15));
  CHECK(base().derived_sigma(whet::exact([](const auto& at) { return at["a"] / at["b"]; })) ==
        close_to(2.84433218241291, 5e-15));
}

TEST_CASE("The covariance matrix holds the sigmas and the correlations") {
  const Forecast forecast = base();
  const Eigen::MatrixXd c = forecast.covariance();
  for (Eigen::Index i = 0; i < 3; ++i) {
    for (Eigen::Index j = 0; j < 3; ++j) {
      const std::string x = abc[i].name, y = abc[j].name;
      CHECK(c(i, j) == close_to(forecast.covariance(x, y), 1e-14));
      CHECK(std::abs(forecast.correlation(x, y) -
                     c(i, j) / forecast.sigma(x) / forecast.sigma(y)) <= 1e-14);
    }
  }
  CHECK(forecast.correlation("a", "a") == 1.0);
}

TEST_CASE("What depends on an unmeasured direction is infinite, what does not is finite") {
  // a and b are seen through their sum; c beside.
  Draws draws(1);
  const Eigen::MatrixXd two = draws.normal(8, 2);
  Eigen::MatrixXd rows(8, 3);
  rows << two.col(0), two.col(0), two.col(1);
  const Forecast forecast(information_of(abc, rows)), sum(information_of(named(2), two));
  CHECK(std::isinf(forecast.sigma("a")));
  CHECK(std::isinf(forecast.derived_sigma(
      whet::exact([](const auto& at) { return at["a"] + 1.001 * at["b"]; }))));
  CHECK(forecast.derived_sigma(whet::exact([](const auto& at) { return at["a"] + at["b"]; })) ==
        close_to(sum.sigma("p0"), 1e-12));
  CHECK(forecast.sigma("c") == close_to(sum.sigma("p1"), 1e-12));
  const Eigen::MatrixXd covariance = forecast.covariance();
  CHECK(std::isinf(covariance(0, 0)));
  CHECK(std::isinf(covariance(1, 1)));
  CHECK(covariance(0, 1) == 0.0);
  CHECK(covariance(2, 2) == close_to(std::pow(sum.sigma("p1"), 2), 1e-12));
  CHECK(forecast.figure_of_merit("a", "c") == 0.0);
  const auto directions = forecast.unconstrained_directions();
  REQUIRE(directions.size() == 1);
  REQUIRE(directions[0].parts.size() == 2);
  CHECK(std::abs(directions[0].parts[0].weight) == 1.0);
  CHECK(directions[0].parts[1].weight == close_to(-directions[0].parts[0].weight, 1e-12));
  REQUIRE(forecast.notes().size() == 1);
  CHECK(forecast.notes()[0].find("not measured: ") == 0);
}

TEST_CASE("The direction is given in units of the conditional sigmas, in any unit") {
  // a twice as strong as b: the null direction is (1, -2), in units of sigma (1, -1).
  for (const double unit : {1e-12, 1.0, 1e12}) {
    const Eigen::MatrixXd rows{{2.0 * unit, 1.0}, {4.0 * unit, 2.0}, {-1.0 * unit, -0.5}};
    const Forecast forecast(information_of(named(2), rows));
    const auto directions = forecast.unconstrained_directions();
    REQUIRE(directions.size() == 1);
    REQUIRE(directions[0].parts.size() == 2);
    CHECK(directions[0].parts[0].weight == close_to(-directions[0].parts[1].weight, 1e-12));
  }
}

TEST_CASE("The others hold to two per cent with the direction known ten times better than noted") {
  // Twins that are half of their errors apart, in a direction that the other parameters share.
  Draws draws(2);
  double worst = 0.0;
  for (int trial = 0; trial < 300; ++trial) {
    Eigen::MatrixXd rows = draws.normal(9, 4);
    const double error = draws.decades(-8.0, -3.0);
    rows.col(1) = rows.col(0) + 0.5 * error * rows.col(1) / rows.col(1).norm();
    const Eigen::VectorXd sizes = Eigen::VectorXd::Constant(4, error);
    const Information information = information_of(named(4), rows, sizes);
    const Forecast forecast(information);
    const auto directions = forecast.unconstrained_directions();
    REQUIRE(directions.size() == 1);
    const auto solved =
        whet::detail::solve<double>(information.root(), 4, information.parts().root.errors());
    Eigen::MatrixXd known(10, 4);
    known << rows, 10.0 * solved.null.bounds[0] * solved.null.fixing.row(0);
    const Eigen::VectorXd truth = whet::test::true_sigmas(known);
    for (Eigen::Index p = 2; p < 4; ++p) {
      const std::string name = "p" + std::to_string(p);
      worst = std::max(worst, std::abs(forecast.sigma(name) / truth(p) - 1.0));
      CHECK(std::abs(forecast.sigma(name) - truth(p)) <=
            forecast.numerical_error(name) + 0.02 * truth(p));
    }
  }
  MESSAGE("largest relative change ", worst);
}

TEST_CASE("What cannot be asked is refused by name") {
  const Forecast forecast(information_of(abc, Eigen::MatrixXd{{1.0, 1.0, 0.0}, {0.0, 0.0, 1.0}}));
  const auto refused = [](const auto& call, const char* words) {
    CHECK_THROWS_WITH_AS((void)call(), doctest::Contains(words), ParameterError);
  };
  refused([&] { return forecast.sigma("d"); }, "parameter \"d\": not among a, b, c");
  refused([&] { return forecast.conditional_sigma("d"); }, "\"d\"");
  refused([&] { return forecast.numerical_error("d"); }, "\"d\"");
  refused([&] { return forecast.correlation("a", "c"); }, "parameter \"a\": got an infinite sigma");
  refused([&] { return forecast.covariance("b", "c"); }, "parameter \"b\": got an infinite sigma");
  refused([&] { return forecast.correlation("a", "a"); }, "parameter \"a\": got an infinite sigma");
  refused([&] { return forecast.correlation("d", "d"); }, "\"d\"");
  refused([&] { return forecast.ellipse("c", "a", Confidence::probability(0.9)); },
          "parameter \"a\": got an infinite sigma");
  refused([&] { return forecast.ellipse("c", "c", Confidence::probability(0.9)); }, "\"c\" twice");
  refused([&] { return forecast.bias("c", "leak"); },
          "shift \"leak\": not among the shifts: there are none");
}

TEST_CASE("A bias of what is not measured is refused, of the rest it is finite") {
  const Eigen::MatrixXd rows{{1.0, 1.0, 0.0, 3.0}, {0.0, 0.0, 2.0, 4.0}};
  const Forecast forecast(information_of(abc, rows, {"leak"}));
  CHECK(forecast.bias("c", "leak") == close_to(2.0, 1e-14));
  CHECK_THROWS_WITH_AS((void)forecast.bias("a", "leak"), doctest::Contains("\"a\""),
                       ParameterError);
  CHECK_THROWS_WITH_AS((void)forecast.bias("c", "drift"),
                       doctest::Contains("shift \"drift\": not among leak"), ParameterError);
}

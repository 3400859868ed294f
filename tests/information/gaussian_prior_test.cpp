#include <whet/information/gaussian_prior.hpp>

#include <cmath>
#include <string>
#include <vector>

#include <doctest/doctest.h>
#include <boost/multiprecision/cpp_bin_float.hpp>

#include <whet/forecasts/forecast.hpp>
#include <whet/information/information.hpp>

#include <information/random_problems.hpp>
#include <support/close_to.hpp>

using whet::CovarianceError;
using whet::Forecast;
using whet::GaussianPrior;
using whet::Information;
using whet::ParameterError;
using whet::test::close_to;
using whet::test::information_of;
using whet::test::named;

TEST_CASE("A prior adds 1 / sigma^2 to the information on its parameter") {
  const Information one = Information::from_matrix({{"h", 0.7}}, Eigen::MatrixXd{{3.0}});
  // By hand: 1 / sqrt(3 + 16).
  CHECK(Forecast(one + GaussianPrior("h", 0.25)).sigma("h") ==
        close_to(1.0 / std::sqrt(19.0), 1e-14));
}

TEST_CASE("A correlated prior adds the inverse of its covariance, names in any order") {
  const Eigen::Matrix2d covariance{{4.0, 1.0}, {1.0, 9.0}};
  const Information weak =
      Information::from_matrix(named(3), 1e-30 * Eigen::MatrixXd::Identity(3, 3));
  const Forecast forecast(weak + GaussianPrior({"p2", "p0"}, covariance));
  CHECK(forecast.sigma("p2") == close_to(2.0, 1e-13));
  CHECK(forecast.sigma("p0") == close_to(3.0, 1e-13));
  CHECK(forecast.covariance("p0", "p2") == close_to(1.0, 1e-13));
}

TEST_CASE("A strongly correlated prior states what rounding leaves of it") {
  using Wide = boost::multiprecision::number<boost::multiprecision::cpp_bin_float_50::backend_type,
                                             boost::multiprecision::et_off>;
  for (const double apart : {1e-3, 1e-6, 1e-9, 1e-12}) {
    const Eigen::Matrix2d covariance{{1.0, 0.3 * (1.0 - apart)}, {0.3 * (1.0 - apart), 0.09}};
    const Eigen::MatrixXd rows{{0.4, 2.0}, {-0.2, 0.9}};
    const Forecast forecast(information_of(named(2), rows) +
                            GaussianPrior({"p0", "p1"}, covariance));
    // At fifty digits, of the same doubles.
    const Wide a(covariance(0, 0)), b(covariance(0, 1)), c(covariance(1, 1));
    const Wide determinant = a * c - b * b;
    const auto f = [&rows](int i, int j) {
      return Wide(rows(0, i)) * rows(0, j) + Wide(rows(1, i)) * rows(1, j);
    };
    const Wide f00 = f(0, 0) + c / determinant, f11 = f(1, 1) + a / determinant,
               f01 = f(0, 1) - b / determinant;
    const Wide all = f00 * f11 - f01 * f01;
    const double s0 = static_cast<double>(Wide(sqrt(Wide(f11 / all)))),
                 s1 = static_cast<double>(Wide(sqrt(Wide(f00 / all))));
    INFO("1 - correlation ", apart);
    CHECK(std::abs(forecast.sigma("p0") - s0) <= forecast.numerical_error("p0"));
    CHECK(std::abs(forecast.sigma("p1") - s1) <= forecast.numerical_error("p1"));
    CHECK(forecast.numerical_error("p0") <= 1e-13 / apart * s0);
  }
}

TEST_CASE("An infinitely weak prior is none, and a very sharp one holds its parameter") {
  whet::test::Draws draws(1);
  const Information a = information_of(named(3), draws.normal(9, 3));
  const Forecast weak(a + GaussianPrior("p0", 1e15)), sharp(a + GaussianPrior("p0", 1e-15));
  const Forecast none(a), held(a.holding({"p0"}));
  for (const std::string name : {"p1", "p2"}) {
    CHECK(weak.sigma(name) == close_to(none.sigma(name), 1e-13));
    CHECK(sharp.sigma(name) == close_to(held.sigma(name), 1e-13));
  }
}

TEST_CASE("A prior that is none is refused with the reason") {
  for (const double sigma : {0.0, -1.0, std::nan(""), HUGE_VAL}) {
    CHECK_THROWS_WITH_AS(GaussianPrior("h", sigma),
                         doctest::Contains("standard deviation of parameter \"h\""),
                         ParameterError);
  }
  const Eigen::Matrix2d identity = Eigen::Matrix2d::Identity();
  CHECK_THROWS_WITH_AS(GaussianPrior({"a"}, identity),
                       doctest::Contains("number of names: got 1, expected 2"), ParameterError);
  CHECK_THROWS_WITH_AS(GaussianPrior({"a", "a"}, identity),
                       doctest::Contains("parameter \"a\" is given twice"), ParameterError);
  CHECK_THROWS_WITH_AS(GaussianPrior({"a", "b"}, Eigen::Matrix2d{{1.0, 1.0}, {1.0, 1.0}}),
                       doctest::Contains("positive definite"), CovarianceError);
}

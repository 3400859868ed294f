#include <whet/covariances/diagonal_covariance.hpp>

#include <cmath>
#include <random>
#include <vector>

#include <doctest/doctest.h>

#include <support/close_to.hpp>

using whet::CovarianceError;
using whet::DiagonalCovariance;
using whet::test::close_to;

TEST_CASE("Whitening divides each row by the standard deviation of its datum") {
  const auto covariance = DiagonalCovariance::from_standard_deviations({0.5, 4.0});
  const Eigen::MatrixXd rows{{1.0, 2.0}, {6.0, 8.0}};
  const Eigen::MatrixXd expected{{2.0, 4.0}, {1.5, 2.0}};  // by hand, exact in binary
  CHECK(covariance.whiten(rows) == expected);
}

TEST_CASE("The squared length of whitened residuals is chi-squared") {
  const Eigen::Vector3d residuals(0.2, -1e-9, 5e4);
  const auto covariance = DiagonalCovariance::from_standard_deviations({0.1, 3e-9, 7e4});
  // By hand: 2^2 + (1/3)^2 + (5/7)^2 = 2038/441.
  CHECK(covariance.whiten(residuals).squaredNorm() == close_to(2038.0 / 441.0, 1e-14));
}

TEST_CASE("A change of unit leaves whitened rows unchanged, however small the unit") {
  const Eigen::Vector2d residuals(1.1, -2.3);
  for (const int power : {-300, -60, 60, 300}) {
    const double unit = std::ldexp(1.0, power);  // a power of two scales without rounding
    const auto plain = DiagonalCovariance::from_standard_deviations({0.3, 0.7});
    const auto scaled = DiagonalCovariance::from_standard_deviations({unit * 0.3, unit * 0.7});
    CHECK(scaled.whiten(unit * residuals) == plain.whiten(residuals));
  }
}

TEST_CASE("The bound is met by errors of any sign, and independent errors stay below theirs") {
  const auto covariance = DiagonalCovariance::from_standard_deviations({0.5, 2.0, 4.0});
  const Eigen::Vector3d errors(0.1, 0.6, 0.4);
  // By hand: whitened they are 0.2, 0.3 and 0.1.
  CHECK(covariance.bound(errors) == close_to(std::sqrt(0.14), 1e-15));
  CHECK(covariance.whiten(Eigen::Vector3d(-0.1, 0.6, -0.4)).norm() ==
        close_to(covariance.bound(errors), 1e-15));
  CHECK(covariance.independent_bound(errors) == close_to(0.3, 1e-15));
  CHECK(covariance.independent_length(errors) == close_to(std::sqrt(0.14), 1e-15));
  CHECK(covariance.condition() == 1.0);
}

TEST_CASE("Independent errors have no larger deviation along any direction than stated") {
  const Eigen::Index n = 20;
  std::mt19937_64 engine(1);
  std::normal_distribution<double> normal;
  Eigen::VectorXd deviations(n), errors(n), direction(n);
  for (Eigen::Index i = 0; i < n; ++i) {
    deviations(i) = std::exp(normal(engine));
    errors(i) = 0.1 * std::exp(normal(engine));
    direction(i) = normal(engine);
  }
  direction.normalize();
  const auto covariance = DiagonalCovariance::from_standard_deviations(deviations);
  double sum = 0.0, square = 0.0;
  const int draws = 20000;
  for (int draw = 0; draw < draws; ++draw) {
    Eigen::VectorXd error(n);
    for (Eigen::Index i = 0; i < n; ++i) error(i) = errors(i) * normal(engine);
    const Eigen::VectorXd white = covariance.whiten(error);
    sum += std::pow(direction.dot(white), 2);
    square += white.squaredNorm();
  }
  CHECK(std::sqrt(sum / draws) <= covariance.independent_bound(errors) * 1.02);
  // Four standard errors of a mean of chi^2-like squares.
  CHECK(std::sqrt(square / draws) == close_to(covariance.independent_length(errors), 0.03));
}

TEST_CASE("n data of one standard deviation need no list") {
  const auto covariance = DiagonalCovariance::uniform(3, 0.5);
  CHECK(covariance.size() == 3);
  CHECK(covariance.standard_deviations() == Eigen::VectorXd::Constant(3, 0.5));
}

TEST_CASE("A standard deviation that is not finite and positive is refused by name") {
  for (const double bad : {0.0, -1.0, std::nan(""), HUGE_VAL}) {
    CHECK_THROWS_WITH_AS((void)DiagonalCovariance::from_standard_deviations({1.0, bad}),
                         doctest::Contains("element 1: got "), CovarianceError);
    CHECK_THROWS_WITH_AS((void)DiagonalCovariance::uniform(2, bad),
                         doctest::Contains("element 0: got "), CovarianceError);
  }
}

TEST_CASE("No data are refused") {
  CHECK_THROWS_WITH_AS((void)DiagonalCovariance::from_standard_deviations(std::vector<double>{}),
                       doctest::Contains("number of data: got 0"), CovarianceError);
  CHECK_THROWS_WITH_AS((void)DiagonalCovariance::uniform(-1, 1.0),
                       doctest::Contains("number of data: got 0"), CovarianceError);
}

TEST_CASE("Rows that do not match the number of data are refused with both sizes") {
  const auto covariance = DiagonalCovariance::from_standard_deviations({1.0, 1.0});
  CHECK_THROWS_WITH_AS((void)covariance.whiten(Eigen::MatrixXd::Zero(3, 2)),
                       doctest::Contains("got 3, expected 2"), CovarianceError);
}

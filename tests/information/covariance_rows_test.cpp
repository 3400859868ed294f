#include <whet/information/covariance_rows.hpp>

#include <cmath>
#include <limits>

#include <doctest/doctest.h>
#include <Eigen/LU>

#include <support/close_to.hpp>

using whet::CovarianceError;
using whet::test::close_to;

TEST_CASE("The rows of a covariance are a root of its inverse") {
  const Eigen::MatrixXd covariance{{4.0, 1.0}, {1.0, 9.0}};
  const auto whitened = whet::detail::rows_of_covariance<double>("here", covariance, 1e-16);
  const Eigen::MatrixXd f = whitened.rows.transpose() * whitened.rows;
  CHECK((f - covariance.inverse()).norm() <= 1e-15 * f.norm());
}

TEST_CASE("A relative error of elements is one of roots of the diagonal, with what adds to it") {
  const double eps = std::numeric_limits<double>::epsilon();
  Eigen::MatrixXd matrix{{4.0, 1.0}, {1.0, 9.0}};
  CHECK(whet::detail::element_error<double>(matrix, 0.0) == close_to(2.0 * eps, 1e-15));
  // By hand: 0.5 * 1.5 / 0.5.
  CHECK(whet::detail::element_error<double>(matrix, 0.5) == close_to(1.5, 1e-14));
  matrix(0, 1) = 1.06;  // 0.06 / (2 * 3), half of it
  CHECK(whet::detail::element_error<double>(matrix, 0.0) == close_to(0.005, 1e-12));
}

TEST_CASE("A covariance that its errors could make singular is refused") {
  const Eigen::MatrixXd covariance{{1.0, 0.999}, {0.999, 1.0}};
  CHECK_NOTHROW((void)whet::detail::rows_of_covariance<double>("here", covariance, 1e-5));
  CHECK_THROWS_WITH_AS((void)whet::detail::rows_of_covariance<double>("here", covariance, 1e-3),
                       doctest::Contains("here: the covariance: got one that may be singular"),
                       CovarianceError);
}

#include <whet/information/error_sources.hpp>

#include <cmath>

#include <doctest/doctest.h>

#include <support/close_to.hpp>

using whet::ErrorSources;
using whet::NumericalErrors;
using whet::test::close_to;

TEST_CASE("The bound along a direction is the sum over the sources") {
  ErrorSources sources = ErrorSources::of_columns(Eigen::Vector2d(0.1, 0.02));
  // By hand: 0.1 * 3 + 0.02 * 5.
  CHECK(sources.bound(Eigen::Vector2d(3.0, -5.0)) == close_to(0.4, 1e-15));
  // After a change of columns: (x, y) = (u + v, u - v).
  const ErrorSources changed = sources.through(Eigen::Matrix2d{{1.0, 1.0}, {1.0, -1.0}});
  CHECK(changed.bound(Eigen::Vector2d(-1.0, 4.0)) == close_to(0.4, 1e-15));
}

TEST_CASE("Both kinds add to the bound, and in squares to the error of a column") {
  NumericalErrors errors{ErrorSources::of_columns(Eigen::Vector2d(3.0, 1.0)), {}};
  errors.append({ErrorSources::none(2), {ErrorSources::of_columns(Eigen::Vector2d(4.0, 0.0))}});
  CHECK(errors.bound(Eigen::Vector2d(1.0, 1.0)) == close_to(8.0, 1e-15));
  CHECK(errors.of_each_column()(0) == close_to(5.0, 1e-15));
  CHECK(errors.of_each_column()(1) == close_to(1.0, 1e-15));
  CHECK(errors.times(2.0).bound(Eigen::Vector2d(1.0, 1.0)) == close_to(16.0, 1e-15));
}

TEST_CASE("What was integrated out stays in the forecast error of a source's combination") {
  // R = [[2, 1], [0, 0.5]] with the first column integrated out, by hand: R^-1 has the rows
  // (0.5, -1) and (0, 2), so that the first parameter has a variance of 1.25.
  const Eigen::MatrixXd transfer{{-0.5}, {1.0}}, half{{0.5}, {0.0}};
  const ErrorSources sources =
      ErrorSources::of_columns(Eigen::Vector2d(1.0, 1.0)).without(transfer, half);
  const Eigen::VectorXd sigmas = sources.sigmas(Eigen::MatrixXd{{2.0}});
  CHECK(sigmas(0) == close_to(std::sqrt(1.25), 1e-15));
  CHECK(sigmas(1) == close_to(2.0, 1e-15));
}

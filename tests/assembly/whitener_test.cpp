#include <whet/assembly/whitener.hpp>

#include <cmath>

#include <doctest/doctest.h>

#include <whet/covariances/dense_covariance.hpp>
#include <whet/covariances/diagonal_covariance.hpp>

#include <support/close_to.hpp>

using whet::DenseCovariance;
using whet::DiagonalCovariance;
using whet::detail::ColumnError;
using whet::detail::Whitener;
using whet::test::close_to;

TEST_CASE("Errors are sized by the noise of the data, truncation and noise added") {
  const auto covariance = DiagonalCovariance::from_standard_deviations({0.5, 2.0});
  const Whitener whitener(covariance);
  // By hand: truncation whitens to (0.6, -0.8), noise to (0.3, 0.4).
  const ColumnError coherent{Eigen::Vector2d(0.3, -1.6), Eigen::Vector2d(0.15, 0.8), false};
  const ColumnError independent{Eigen::Vector2d(0.3, -1.6), Eigen::Vector2d(0.15, 0.8), true};
  CHECK(whitener.size(coherent, true) == close_to(1.5, 1e-15));
  CHECK(whitener.size(coherent, false) == close_to(1.5, 1e-15));
  CHECK(whitener.size(independent, true) == close_to(1.4, 1e-15));
  CHECK(whitener.independent_length(independent.noise) == close_to(0.5, 1e-15));
}

TEST_CASE("Under correlation a signed estimate is whitened, and unsigned sizes are bounded") {
  const double r = 0.999;
  const DenseCovariance covariance(Eigen::Matrix2d{{1.0, r}, {r, 1.0}});
  const Whitener whitener(covariance);
  const ColumnError alike{Eigen::Vector2d(0.1, 0.1), Eigen::Vector2d::Zero(), false};
  const ColumnError opposed{Eigen::Vector2d(0.1, -0.1), Eigen::Vector2d::Zero(), false};
  // By hand: e^T C^-1 e = 2 e^2 / (1 +- r).
  CHECK(whitener.size(alike, true) == close_to(0.1 * std::sqrt(2.0 / (1.0 + r)), 1e-12));
  CHECK(whitener.size(opposed, true) == close_to(0.1 * std::sqrt(2.0 / (1.0 - r)), 1e-12));
  CHECK(whitener.size(alike, false) >= whitener.size(opposed, true));
  CHECK(whitener.size(alike, false) == whitener.size(opposed, false));
  const auto diagonal = DiagonalCovariance::uniform(2, 1.0);
  CHECK(whitener.rounding(1.0, 2) > 1e3 * Whitener(diagonal).rounding(1.0, 2));
}

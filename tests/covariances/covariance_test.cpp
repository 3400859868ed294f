#include <whet/covariances/covariance.hpp>

#include <doctest/doctest.h>

#include <whet/covariances/dense_covariance.hpp>
#include <whet/covariances/diagonal_covariance.hpp>

namespace {

/// Whitens, but does not say how large an error becomes.
struct Silent {
  [[nodiscard]] static Eigen::Index size() { return 1; }
  [[nodiscard]] static Eigen::MatrixXd whiten(const Eigen::MatrixXd& rows) { return rows; }
};

}  // namespace

TEST_CASE("A covariance whitens and bounds errors, and what only whitens is none") {
  static_assert(whet::Covariance<whet::DiagonalCovariance>);
  static_assert(whet::Covariance<whet::DenseCovariance>);
  static_assert(!whet::Covariance<Silent>);
  static_assert(!whet::Covariance<Eigen::MatrixXd>);
  CHECK(Silent::whiten(Eigen::MatrixXd::Ones(1, 1)).size() == Silent::size());
}

#include <whet/covariances/dense_covariance.hpp>

#include <algorithm>
#include <cmath>
#include <memory>
#include <random>

#include <doctest/doctest.h>
#include <Eigen/Cholesky>
#include <Eigen/Eigenvalues>
#include <Eigen/LU>

#include <support/close_to.hpp>

using whet::CovarianceError;
using whet::DenseCovariance;
using whet::test::close_to;

namespace {

Eigen::MatrixXd normal(std::mt19937_64& engine, Eigen::Index rows, Eigen::Index cols) {
  std::normal_distribution<double> draw;
  Eigen::MatrixXd matrix(rows, cols);
  for (Eigen::Index j = 0; j < cols; ++j) {
    for (Eigen::Index i = 0; i < rows; ++i) matrix(i, j) = draw(engine);
  }
  return matrix;
}

/// Correlation r^|i - j| with deviations over some decades.
Eigen::MatrixXd neighbours(Eigen::Index n, double r, double decades) {
  Eigen::MatrixXd matrix(n, n);
  for (Eigen::Index i = 0; i < n; ++i) {
    for (Eigen::Index j = 0; j < n; ++j) {
      const double t = decades * static_cast<double>(i + j) / static_cast<double>(n) / 2.0;
      matrix(i, j) = std::pow(r, std::abs(static_cast<double>(i - j))) * std::pow(10.0, t);
    }
  }
  return matrix;
}

}  // namespace

TEST_CASE("Whitened rows have the products of the inverse, as Eigen has them") {
  std::mt19937_64 engine(1);
  const Eigen::MatrixXd root = normal(engine, 12, 12);
  const Eigen::MatrixXd matrix = root * root.transpose() + Eigen::MatrixXd::Identity(12, 12);
  const DenseCovariance covariance(matrix);
  const Eigen::MatrixXd rows = normal(engine, 12, 4), white = covariance.whiten(rows);
  const Eigen::MatrixXd product = rows.transpose() * matrix.inverse() * rows;
  CHECK((white.transpose() * white - product).norm() <= 1e-12 * product.norm());
  // L of C = L L^T is unique: the rows are Eigen's too.
  const Eigen::LLT<Eigen::MatrixXd> llt(matrix);
  const Eigen::MatrixXd by_eigen = llt.matrixL().solve(rows);
  CHECK((white - by_eigen).norm() <= 1e-12 * by_eigen.norm());
  CHECK(covariance.size() == 12);
}

TEST_CASE("Variances from 1e-24 to 1e24 in one matrix whiten like those of one unit") {
  std::mt19937_64 engine(2);
  const Eigen::Index n = 9;
  const Eigen::MatrixXd plain = neighbours(n, 0.8, 0.0), rows = normal(engine, n, 3);
  Eigen::VectorXd units(n);
  for (Eigen::Index i = 0; i < n; ++i)
    units(i) = std::pow(10.0, -12.0 + 3.0 * static_cast<double>(i));
  const DenseCovariance scaled(units.asDiagonal() * plain * units.asDiagonal());
  const Eigen::MatrixXd white = DenseCovariance(plain).whiten(rows);
  CHECK((scaled.whiten(units.asDiagonal() * rows) - white).norm() <= 1e-13 * white.norm());
  CHECK(scaled.condition() == close_to(DenseCovariance(plain).condition(), 1e-10));
}

TEST_CASE("The bound holds for any signs, under a correlation of 0.999 too") {
  std::mt19937_64 engine(3);
  for (const double r : {0.0, 0.9, 0.999}) {
    const Eigen::MatrixXd matrix = neighbours(30, r, 3.0);
    const DenseCovariance covariance(matrix);
    double largest = 0.0;
    for (int trial = 0; trial < 500; ++trial) {
      const Eigen::VectorXd sizes =
          normal(engine, 30, 1).cwiseAbs().cwiseProduct(matrix.diagonal().cwiseSqrt());
      Eigen::VectorXd error = sizes;
      for (Eigen::Index i = 0; i < 30; ++i) {
        const bool alternating = trial % 5 == 0 && i % 2 == 1;
        if (alternating || (trial % 5 != 0 && engine() % 2 == 0)) error(i) = -error(i);
      }
      const double length = covariance.whiten(error).norm(), bound = covariance.bound(sizes);
      CHECK(length <= bound);
      largest = std::max(largest, length / bound);
    }
    CHECK(largest > 0.2);  // a bound, and no idle one
  }
}

TEST_CASE("Independent errors have no larger deviation along any direction than stated") {
  // Exact: L^-1 diag(e^2) L^-T has an eigenvalue no larger, and a trace of the square length.
  const Eigen::MatrixXd matrix = neighbours(15, 0.95, 2.0);
  const DenseCovariance covariance(matrix);
  std::mt19937_64 engine(4);
  const Eigen::VectorXd errors = normal(engine, 15, 1).cwiseAbs();
  const Eigen::MatrixXd white = covariance.whiten(Eigen::MatrixXd(errors.asDiagonal()));
  const Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd> solver(white * white.transpose());
  CHECK(std::sqrt(solver.eigenvalues()(14)) <= covariance.independent_bound(errors));
  CHECK(covariance.independent_length(errors) == close_to(white.norm(), 1e-12));
  // And drawn: the root mean square of 20000 lengths, to four standard errors.
  double sum = 0.0;
  for (int draw = 0; draw < 20000; ++draw) {
    const Eigen::VectorXd error = normal(engine, 15, 1).cwiseProduct(errors);
    sum += covariance.whiten(error).squaredNorm();
  }
  CHECK(std::sqrt(sum / 20000) == close_to(covariance.independent_length(errors), 0.03));
}

TEST_CASE("The condition number is that of the correlation matrix, in the 1-norm") {
  // [[1, r], [r, 1]] has |C|_1 |C^-1|_1 = (1 + r) / (1 - r), by hand.
  const double r = 0.99;
  const DenseCovariance covariance(Eigen::Matrix2d{{1e-6, r * 1e3}, {r * 1e3, 1e12}});
  CHECK(covariance.condition() == close_to((1.0 + r) / (1.0 - r), 1e-10));
  CHECK(DenseCovariance(Eigen::Matrix3d::Identity()).condition() == close_to(1.0, 1e-15));
}

TEST_CASE("Copies share the factor, and outlive the first") {
  auto first = std::make_unique<DenseCovariance>(Eigen::Matrix2d{{4.0, 0.0}, {0.0, 16.0}});
  const DenseCovariance copy = *first;
  first.reset();
  CHECK(copy.whiten(Eigen::Vector2d(2.0, 2.0)) == Eigen::MatrixXd(Eigen::Vector2d(1.0, 0.5)));
  static_assert(sizeof(DenseCovariance) == sizeof(std::shared_ptr<int>));
}

TEST_CASE("What is no covariance is refused with the reason") {
  const auto refused = [](const Eigen::MatrixXd& matrix, const char* words) {
    CHECK_THROWS_WITH_AS((void)DenseCovariance(matrix), doctest::Contains(words), CovarianceError);
  };
  refused(Eigen::MatrixXd::Zero(0, 0), "shape: got 0 x 0");
  refused(Eigen::MatrixXd::Identity(2, 3), "shape: got 2 x 3");
  refused(Eigen::Matrix2d{{1.0, 2.0}, {2.0, 1.0}}, "expected a positive definite matrix");
  refused(Eigen::Matrix2d{{1.0, 1.0}, {1.0, 1.0}}, "expected a positive definite matrix");
  refused(Eigen::Matrix2d{{1.0, 0.5}, {0.1, 1.0}}, "elements (0, 1) and (1, 0): got 0.5 and 0.1");
  refused(Eigen::Matrix2d{{1.0, 0.0}, {0.0, 0.0}}, "variance of element 1: got 0");
  refused(Eigen::Matrix2d{{std::nan(""), 0.0}, {0.0, 1.0}}, "variance of element 0: got nan");
  refused(Eigen::Matrix2d{{1.0, HUGE_VAL}, {HUGE_VAL, 1.0}}, "equal finite values");
  // A sum of fewer independent terms than data.
  std::mt19937_64 engine(5);
  const Eigen::MatrixXd terms = normal(engine, 6, 4);
  refused(terms * terms.transpose(), "model common modes as parameters with priors instead");
}

TEST_CASE("Rows that do not match the number of data are refused with both sizes") {
  const DenseCovariance covariance(Eigen::Matrix2d::Identity());
  CHECK_THROWS_WITH_AS((void)covariance.whiten(Eigen::MatrixXd::Zero(3, 2)),
                       doctest::Contains("got 3, expected 2"), CovarianceError);
}

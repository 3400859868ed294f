#include <whet/information/given.hpp>

#include <cmath>
#include <string>
#include <vector>

#include <doctest/doctest.h>
#include <Eigen/Eigenvalues>
#include <Eigen/LU>

#include <whet/forecasts/forecast.hpp>

#include <information/random_problems.hpp>
#include <support/close_to.hpp>

using whet::CovarianceError;
using whet::Forecast;
using whet::Information;
using whet::Parameters;
using whet::test::close_to;
using whet::test::Draws;
using whet::test::LongMatrix;
using whet::test::named;
using whet::test::true_sigmas_of_matrix;

namespace {

double printed(double value, int digits) {
  if (value == 0.0) return 0.0;
  const double unit = std::pow(10.0, std::floor(std::log10(std::abs(value))) + 1.0 - digits);
  return std::round(value / unit) * unit;
}

LongMatrix inverse(const LongMatrix& matrix) {
  return matrix.ldlt().solve(LongMatrix::Identity(matrix.rows(), matrix.rows()));
}

/// A symmetric positive definite matrix of a condition number.
LongMatrix draw(Draws& draws, Eigen::Index count, double condition) {
  const Eigen::HouseholderQR<LongMatrix> qr(draws.normal(count, count).cast<long double>());
  const LongMatrix q = qr.householderQ();
  LongMatrix values = LongMatrix::Zero(count, count);
  for (Eigen::Index k = 0; k < count; ++k) {
    const double part = static_cast<double>(k) / static_cast<double>(std::max<long>(1, count - 1));
    values(k, k) = std::pow(condition, -part);
  }
  LongMatrix matrix = q * values * q.transpose();
  LongMatrix units = LongMatrix::Zero(count, count);
  for (Eigen::Index p = 0; p < count; ++p) units(p, p) = draws.decades(-6.0, 6.0);
  matrix = units * matrix * units;
  return 0.5L * (matrix + matrix.transpose());
}

Eigen::MatrixXd printed(const LongMatrix& matrix, int digits) {
  Eigen::MatrixXd out(matrix.rows(), matrix.cols());
  for (Eigen::Index j = 0; j < out.cols(); ++j) {
    for (Eigen::Index i = 0; i < out.rows(); ++i) {
      out(i, j) = printed(static_cast<double>(matrix(i, j)), digits);
    }
  }
  return out;
}

/// What is called unmeasured is only unmeasured above the error: the others hold where it is known
/// from elsewhere to far better than that. The matrix with that known.
LongMatrix with_null_known(const Information& information, LongMatrix matrix) {
  const whet::RootInformation& root = information.parts().root;
  const auto solved = whet::detail::solve<double>(root.root(), root.parameters(), root.errors());
  for (Eigen::Index k = 0; k < solved.null.size(); ++k) {
    const LongMatrix row = 100.0 * solved.null.bounds[static_cast<std::size_t>(k)] *
                           solved.null.fixing.row(k).cast<long double>();
    matrix += row.transpose() * row;
  }
  return matrix;
}

}  // namespace

TEST_CASE("No sigma of a printed Fisher matrix is further off than stated") {
  Draws draws(20260301);
  int bounded = 0, refused = 0;
  std::vector<double> part;
  for (int trial = 0; trial < 2000; ++trial) {
    const Eigen::Index count = draws.integer(1, 6);
    const int digits = draws.integer(2, 8);
    const LongMatrix exact = draw(draws, count, draws.decades(0.0, 6.0));
    const Parameters parameters = named(count);
    const Information information =
        Information::from_matrix(parameters, printed(exact, digits), {.digits = digits});
    const Forecast forecast(information);
    (void)forecast.notes();
    const Eigen::VectorXd truth = true_sigmas_of_matrix(with_null_known(information, exact));
    for (Eigen::Index a = 0; a < count; ++a) {
      const std::string& name = parameters[a].name;
      const double sigma = forecast.sigma(name), stated = forecast.numerical_error(name);
      if (std::isinf(sigma)) {
        ++refused;
        continue;
      }
      INFO("trial ", trial, ", digits ", digits, ", ", name);
      CHECK(std::abs(sigma - truth(a)) <= stated);
      if (std::isfinite(stated)) ++bounded;
    }
  }
  MESSAGE("sigmas with a bound ", bounded, ", not measured ", refused);
  CHECK(bounded > 2500);
}

TEST_CASE("No sigma of a printed covariance is further off than stated, joined or not") {
  Draws draws(20260302);
  int bounded = 0, refused = 0;
  for (int trial = 0; trial < 2000; ++trial) {
    const Eigen::Index count = draws.integer(1, 6);
    const int digits = draws.integer(2, 8);
    const LongMatrix exact = draw(draws, count, draws.decades(0.0, 6.0));
    const Parameters parameters = named(count);
    const Eigen::MatrixXd given = printed(exact, digits);
    Information information =
        Information::from_matrix(parameters, Eigen::MatrixXd::Identity(count, count));
    try {
      information = Information::from_covariance(parameters, given, {.digits = digits});
    } catch (const CovarianceError&) {
      ++refused;  // singular to its digits
      continue;
    }
    // Another probe, known well, that measures a combination of the parameters.
    const Eigen::MatrixXd row =
        draws.normal(1, count) * given.diagonal().cwiseSqrt().cwiseInverse().asDiagonal() * 3.0;
    const Information probe = whet::test::information_of(parameters, row);
    const LongMatrix long_row = row.cast<long double>();
    const Eigen::VectorXd alone = exact.diagonal().cwiseSqrt().cast<double>();
    const Eigen::VectorXd joined = true_sigmas_of_matrix(
        with_null_known(information + probe, inverse(exact) + long_row.transpose() * long_row));
    const Forecast forecast(information), joint(information + probe);
    (void)forecast.notes();
    for (Eigen::Index a = 0; a < count; ++a) {
      const std::string& name = parameters[a].name;
      INFO("trial ", trial, ", digits ", digits, ", ", name);
      if (std::isfinite(forecast.sigma(name))) {
        CHECK(std::abs(forecast.sigma(name) - alone(a)) <= forecast.numerical_error(name));
        if (std::isfinite(forecast.numerical_error(name))) ++bounded;
      }
      if (std::isfinite(joint.sigma(name))) {
        CHECK(std::abs(joint.sigma(name) - joined(a)) <= joint.numerical_error(name));
      }
    }
  }
  MESSAGE("sigmas with a bound ", bounded, ", matrices refused ", refused);
  CHECK(bounded > 1500);
}

TEST_CASE("A matrix in double precision keeps its rounding error, to a condition of 1e12") {
  Draws draws(20260303);
  for (int trial = 0; trial < 300; ++trial) {
    const Eigen::Index count = draws.integer(2, 6);
    const Eigen::MatrixXd given = draw(draws, count, draws.decades(2.0, 12.0)).cast<double>();
    const LongMatrix exact = given.cast<long double>();
    const Parameters parameters = named(count);
    const Eigen::VectorXd of_matrix = true_sigmas_of_matrix(exact);
    const Forecast a(Information::from_matrix(parameters, given));
    const Forecast b(Information::from_covariance(parameters, given));
    for (Eigen::Index p = 0; p < count; ++p) {
      const std::string& name = parameters[p].name;
      INFO("trial ", trial, " ", name);
      REQUIRE(std::isfinite(a.sigma(name)));
      CHECK(std::abs(a.sigma(name) - of_matrix(p)) <= a.numerical_error(name));
      CHECK(std::abs(b.sigma(name) - std::sqrt(given(p, p))) <= b.numerical_error(name));
    }
  }
}

TEST_CASE("A given matrix comes back, and gives what a hand would work out") {
  const Eigen::Matrix3d f{{20.0, 4.0, 3.0}, {4.0, 10.0, 2.0}, {3.0, 2.0, 5.0}};
  const Parameters abc{{"a", 1.0}, {"b", 1.0}, {"c", 1.0}};
  const Information information = Information::from_matrix(abc, f);
  CHECK((information.matrix() - f).norm() <= 1e-14 * f.norm());
  CHECK(information.root().isUpperTriangular(0.0));
  const Information of_covariance = Information::from_covariance(abc, f.inverse());
  CHECK((of_covariance.matrix() - f).norm() <= 1e-13 * f.norm());
}

TEST_CASE("A direction that a printed matrix cannot tell from none is not measured") {
  // Two nearly equal columns, printed to three digits: 1.00 throughout.
  const Parameters two{{"a", 1.0}, {"b", 1.0}};
  const Forecast forecast(
      Information::from_matrix(two, Eigen::Matrix2d{{1.0, 1.0}, {1.0, 1.0}}, {.digits = 3}));
  CHECK(std::isinf(forecast.sigma("a")));
  CHECK(std::isinf(forecast.sigma("b")));
  CHECK(forecast.unconstrained_directions().size() == 1);
}

TEST_CASE("A parameter without information of its own is not measured, the others are") {
  const Parameters two{{"a", 1.0}, {"b", 1.0}};
  const Forecast forecast(Information::from_matrix(two, Eigen::Matrix2d{{4.0, 0.0}, {0.0, 0.0}}));
  CHECK(forecast.sigma("a") == close_to(0.5, 1e-14));
  CHECK(std::isinf(forecast.sigma("b")));
}

TEST_CASE("A matrix that is no information is refused with the reason") {
  const Parameters two{{"a", 1.0}, {"b", 1.0}};
  const auto refused = [&](const Eigen::MatrixXd& matrix, const char* words, int digits = 0) {
    CHECK_THROWS_WITH_AS((void)Information::from_matrix(two, matrix, {.digits = digits}),
                         doctest::Contains(words), CovarianceError);
  };
  refused(Eigen::Matrix2d{{1.0, 2.0}, {2.0, 1.0}}, "a negative eigenvalue beyond its digits");
  refused(Eigen::Matrix2d{{1.0, 1.02}, {1.02, 1.0}}, "negative eigenvalue", 3);
  refused(Eigen::MatrixXd::Identity(3, 3), "got 3 x 3, expected 2 x 2");
  refused(Eigen::Matrix2d{{1.0, 0.5}, {0.4, 1.0}},
          "element (\"a\", \"b\") and its mirror: got 0.5 and 0.4");
  refused(Eigen::Matrix2d{{1.0, std::nan("")}, {0.4, 1.0}}, "got nan, expected a finite value");
  refused(Eigen::Matrix2d{{-1.0, 0.0}, {0.0, 1.0}},
          "element (\"a\", \"a\"): got -1, expected a value >= 0");
  refused(Eigen::Matrix2d{{0.0, 0.5}, {0.5, 1.0}}, "no information of its own");
  refused(Eigen::Matrix2d::Identity(), "significant digits of the matrix: got -1", -1);
}

TEST_CASE("A covariance that is none is refused with the reason") {
  const Parameters two{{"a", 1.0}, {"b", 1.0}};
  const auto refused = [&](const Eigen::MatrixXd& matrix, const char* words, int digits = 0) {
    CHECK_THROWS_WITH_AS((void)Information::from_covariance(two, matrix, {.digits = digits}),
                         doctest::Contains(words), CovarianceError);
  };
  refused(Eigen::Matrix2d{{1.0, 1.0}, {1.0, 1.0}}, "positive definite");
  refused(Eigen::Matrix2d{{1.0, 2.0}, {2.0, 1.0}}, "positive definite");
  refused(Eigen::Matrix2d{{1.0, 0.999}, {0.999, 1.0}},
          "may be singular within the errors of its elements", 2);
  refused(Eigen::Matrix2d{{0.0, 0.0}, {0.0, 1.0}}, "variance of element 0");
  refused(Eigen::MatrixXd::Identity(1, 1), "got 1 x 1, expected 2 x 2");
}

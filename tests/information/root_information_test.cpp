#include <whet/information/root_information.hpp>

#include <cmath>
#include <limits>
#include <vector>

#include <doctest/doctest.h>
#include <Eigen/LU>
#include <Eigen/SVD>
#include <boost/multiprecision/cpp_bin_float.hpp>

#include <whet/information/constraints.hpp>

#include <information/random_problems.hpp>
#include <support/close_to.hpp>

using whet::BasicRootInformation;
using whet::CovarianceError;
using whet::RootInformation;
using whet::test::close_to;
using whet::test::Draws;
using whet::test::true_sigmas;

namespace {

using Wide = boost::multiprecision::number<boost::multiprecision::cpp_bin_float_50::backend_type,
                                           boost::multiprecision::et_off>;

RootInformation root_of(const Eigen::MatrixXd& rows, Eigen::Index shifts = 0) {
  RootInformation root(rows.cols() - shifts, shifts);
  root.fold(rows);
  return root;
}

double apart(const Eigen::MatrixXd& a, const Eigen::MatrixXd& b) {
  return (a - b).norm() / b.norm();
}

}  // namespace

TEST_CASE("Two nearly equal columns keep six digits of sigma where an inverse of F has none") {
  // They are 1e-8 apart, so that F has a condition number beyond 1e16.
  Eigen::MatrixXd rows(101, 2);
  Eigen::MatrixX<Wide> exact_matrix = Eigen::MatrixX<Wide>::Zero(2, 2);
  for (Eigen::Index i = 0; i < 101; ++i) {
    const double x = static_cast<double>(i);
    rows(i, 0) = 1.0 + 0.3 * std::cos(x);
    rows(i, 1) = rows(i, 0) + 1e-8 * std::sin(x);
    for (Eigen::Index a = 0; a < 2; ++a) {
      for (Eigen::Index b = 0; b < 2; ++b) exact_matrix(a, b) += Wide(rows(i, a)) * rows(i, b);
    }
  }
  // Fifty digits, by Cramer's rule; the two columns are nearly one, so both sigmas are.
  const Wide determinant =
      exact_matrix(0, 0) * exact_matrix(1, 1) - exact_matrix(0, 1) * exact_matrix(1, 0);
  const double exact = static_cast<double>(Wide(sqrt(Wide(exact_matrix(1, 1) / determinant))));
  BasicRootInformation<Wide> wide(2);
  wide.fold(rows.cast<Wide>());
  CHECK(static_cast<double>(wide.sigmas()(0)) == close_to(exact, 1e-15));
  CHECK(root_of(rows).sigmas()(0) == close_to(exact, 1e-6));
  const Eigen::MatrixXd f = rows.transpose() * rows;
  const double variance = f.inverse()(0, 0);
  CHECK_FALSE(std::sqrt(std::abs(variance)) == close_to(exact, 0.05));
}

TEST_CASE("A fit of powers up to the ninth has the sigmas of fifty digits to eleven") {
  Eigen::MatrixXd rows(60, 10);
  for (Eigen::Index i = 0; i < 60; ++i) {
    for (Eigen::Index j = 0; j < 10; ++j) {
      rows(i, j) = std::pow(-1.0 + 2.0 * static_cast<double>(i) / 59.0, static_cast<double>(j));
    }
  }
  BasicRootInformation<Wide> wide(10);
  wide.fold(rows.cast<Wide>());
  const Eigen::VectorXd sigmas = root_of(rows).sigmas();
  for (Eigen::Index j = 0; j < 10; ++j) {
    CHECK(sigmas(j) == close_to(static_cast<double>(wide.sigmas()(j)), 1e-11));
  }
}

TEST_CASE("The root is an upper triangle with a diagonal that is not negative, and F is R^T R") {
  Draws draws(1);
  const Eigen::MatrixXd rows = draws.normal(30, 6);
  const RootInformation root = root_of(rows);
  CHECK(root.root().isUpperTriangular(0.0));
  CHECK(root.root().diagonal().minCoeff() >= 0.0);
  CHECK(apart(root.matrix(), rows.transpose() * rows) <= 1e-14);
  CHECK(root.log_determinant() ==
        close_to(std::log((rows.transpose() * rows).determinant()), 1e-12));
}

TEST_CASE("Rows in pieces, in another order or merged give the same information") {
  Draws draws(2);
  const Eigen::MatrixXd rows = draws.normal(1000, 7);
  const RootInformation whole = root_of(rows);
  RootInformation pieces(7);
  for (Eigen::Index first = 0; first < 1000; first += 9) {
    pieces.fold(rows.middleRows(first, std::min<Eigen::Index>(9, 1000 - first)));
  }
  RootInformation merged = root_of(rows.bottomRows(10));
  merged.merge(root_of(rows.topRows(990)));
  CHECK(apart(pieces.root(), whole.root()) <= 1e-13);
  CHECK(apart(merged.root(), whole.root()) <= 1e-13);
  CHECK(apart(root_of(rows.colwise().reverse()).root(), whole.root()) <= 1e-13);
}

TEST_CASE("A row of weight 1e15 costs the light ones no digit, wherever it comes") {
  Draws draws(3);
  for (const bool last : {false, true}) {
    Eigen::MatrixXd light = draws.normal(20, 4);
    Eigen::MatrixXd heavy = 1e15 * draws.normal(1, 4);
    Eigen::MatrixXd rows(21, 4);
    if (last) {
      rows << light, heavy;
    } else {
      rows << heavy, light;
    }
    BasicRootInformation<Wide> wide(4);
    wide.fold(rows.cast<Wide>());
    RootInformation root(4);
    if (last) {
      root.fold(light);
      root.fold(heavy);
    } else {
      root.fold(rows);
    }
    const Eigen::MatrixXd r = wide.root().cast<double>();
    for (Eigen::Index i = 0; i < 4; ++i) {
      CHECK((root.root().row(i) - r.row(i)).norm() <= 1e-13 * r.row(i).norm());
    }
  }
  // On one parameter, as a sharp prior has it: the sigmas of the others.
  Eigen::MatrixXd light = draws.normal(20, 4), heavy = Eigen::MatrixXd::Zero(1, 4);
  heavy(0, 2) = 1e15;
  RootInformation root = root_of(light);
  root.fold(heavy);
  const Eigen::VectorXd sigmas = root.sigmas(), held = root_of(light).holding({2}).sigmas();
  CHECK(sigmas(0) == close_to(held(0), 1e-13));
  CHECK(sigmas(1) == close_to(held(1), 1e-13));
  CHECK(sigmas(2) == close_to(1e-15, 1e-13));
  CHECK(sigmas(3) == close_to(held(2), 1e-13));
}

TEST_CASE("Information never decreases by adding rows: the singular values of R interlace") {
  Draws draws(4);
  for (int trial = 0; trial < 50; ++trial) {
    RootInformation root = root_of(draws.normal(8, 5));
    const Eigen::VectorXd before = Eigen::JacobiSVD<Eigen::MatrixXd>(root.root()).singularValues();
    root.fold(draws.normal(1, 5) * draws.decades(-3.0, 3.0));
    const Eigen::VectorXd after = Eigen::JacobiSVD<Eigen::MatrixXd>(root.root()).singularValues();
    for (Eigen::Index k = 0; k < 5; ++k) {
      CHECK(after(k) >= before(k) * (1.0 - 1e-13));
      if (k > 0) CHECK(after(k) <= before(k - 1) * (1.0 + 1e-13));
    }
  }
}

TEST_CASE("Integrating out is the Schur complement, and holding drops rows and columns") {
  const Eigen::Matrix3d f{{20.0, 4.0, 3.0}, {4.0, 10.0, 2.0}, {3.0, 2.0, 5.0}};
  const Eigen::MatrixXd rows = f.llt().matrixU();
  const RootInformation root = root_of(rows);
  // By hand: 20 - 9/5, 4 - 6/5, 10 - 4/5.
  CHECK(apart(root.integrating_out({2}).matrix(), Eigen::Matrix2d{{18.2, 2.8}, {2.8, 9.2}}) <=
        1e-14);
  CHECK(apart(root.holding({2}).matrix(), f.topLeftCorner(2, 2)) <= 1e-14);
  CHECK(root.integrating_out({}).root() == root.root());
  CHECK(root.holding({}).root() == root.root());
}

TEST_CASE("Repeating and replacing multiply as they should") {
  Draws draws(5);
  const Eigen::MatrixXd rows = draws.normal(9, 3), jacobian = draws.normal(3, 2);
  const RootInformation root = root_of(rows);
  CHECK(apart(root.repeated(7.0).matrix(), 7.0 * rows.transpose() * rows) <= 1e-14);
  CHECK(apart(root.replacing(jacobian).matrix(),
              jacobian.transpose() * rows.transpose() * rows * jacobian) <= 1e-13);
}

TEST_CASE("Columns of any size are measured alike") {
  Draws draws(6);
  const Eigen::MatrixXd rows = draws.normal(12, 3);
  const Eigen::VectorXd plain = true_sigmas(rows);
  for (const double unit : {1e-120, 1e-60, 1e60, 1e120}) {
    Eigen::MatrixXd changed = rows;
    changed.col(1) *= unit;
    const Eigen::VectorXd sigmas = root_of(changed).sigmas();
    CHECK(sigmas(0) == close_to(plain(0), 1e-13));
    CHECK(unit * sigmas(1) == close_to(plain(1), 1e-13));
    CHECK(sigmas(2) == close_to(plain(2), 1e-13));
  }
}

TEST_CASE("What is no row or root is refused with the reason") {
  RootInformation root(2, 1);
  CHECK_THROWS_WITH_AS(root.fold(Eigen::MatrixXd::Zero(3, 2)),
                       doctest::Contains("number of columns: got 2, expected 3"), CovarianceError);
  Eigen::MatrixXd rows = Eigen::MatrixXd::Ones(4, 3);
  rows(2, 1) = std::nan("");
  CHECK_THROWS_WITH_AS(root.fold(rows), doctest::Contains("row 2, column 1: got nan"),
                       CovarianceError);
  rows(2, 1) = std::numeric_limits<double>::infinity();
  RootInformation other(2, 1);
  CHECK_THROWS_WITH_AS(other.fold(rows), doctest::Contains("row 2, column 1: got inf"),
                       CovarianceError);
  const auto refused = [](const Eigen::MatrixXd& matrix) {
    CHECK_THROWS_WITH_AS(
        (void)RootInformation::from_root(matrix, 2, whet::NumericalErrors::none(2)),
        doctest::Contains("expected an upper triangle of finite numbers"), CovarianceError);
  };
  refused(Eigen::MatrixXd{{1.0, 0.0}, {0.5, 1.0}});
  refused(Eigen::MatrixXd{{1.0, 0.0}, {0.0, -1.0}});
  refused(Eigen::MatrixXd{{1.0, std::nan("")}, {0.0, 1.0}});
  refused(Eigen::MatrixXd::Identity(1, 1));
  const Eigen::MatrixXd good{{1.0, -2.0}, {0.0, 3.0}};
  CHECK(RootInformation::from_root(good, 2, whet::NumericalErrors::none(2)).root() == good);
}

#include <whet/support/householder.hpp>

#include <algorithm>
#include <cmath>
#include <limits>
#include <random>
#include <vector>

#include <doctest/doctest.h>
#include <Eigen/QR>
#include <boost/multiprecision/cpp_bin_float.hpp>

#include <support/close_to.hpp>

using Eigen::Index;
using Eigen::MatrixXd;
using Eigen::VectorXd;
using whet::detail::fold_rows;
using whet::detail::MatrixOf;
using whet::detail::VectorOf;
using whet::test::close_to;

namespace {

using Wide = boost::multiprecision::number<boost::multiprecision::cpp_bin_float_50::backend_type,
                                           boost::multiprecision::et_off>;

MatrixXd normal(Index rows, Index columns, unsigned seed) {
  std::mt19937 generator(seed);
  std::normal_distribution<double> deviate;
  MatrixXd all(rows, columns);
  for (Index i = 0; i < rows; ++i) {
    for (Index j = 0; j < columns; ++j) all(i, j) = deviate(generator);
  }
  return all;
}

template <class Real = double>
MatrixOf<Real> root_of(const MatrixXd& rows) {
  MatrixOf<Real> root = MatrixOf<Real>::Zero(rows.cols(), rows.cols());
  fold_rows<Real>(root, rows.cast<Real>());
  return root;
}

/// The same in pieces of `rows_each`.
MatrixXd root_of_pieces(const MatrixXd& rows, Index rows_each) {
  MatrixXd root = MatrixXd::Zero(rows.cols(), rows.cols());
  for (Index i = 0; i < rows.rows(); i += rows_each) {
    fold_rows<double>(root, rows.middleRows(i, std::min(rows_each, rows.rows() - i)));
  }
  return root;
}

/// sigma_j, the norm of row j of R^-1.
template <class Real>
VectorOf<Real> sigmas_of(const MatrixOf<Real>& root) {
  using std::sqrt;
  MatrixOf<Real> inverse = MatrixOf<Real>::Identity(root.rows(), root.rows());
  root.template triangularView<Eigen::Upper>().solveInPlace(inverse);
  VectorOf<Real> sigmas(root.rows());
  for (Index j = 0; j < root.rows(); ++j) sigmas(j) = sqrt(inverse.row(j).squaredNorm());
  return sigmas;
}

/// The largest relative error of a sigma that `root`, of these rows, gives: against 50 digits.
double sigma_error(const MatrixXd& root, const MatrixXd& rows) {
  const VectorOf<Wide> truth = sigmas_of<Wide>(root_of<Wide>(rows));
  const VectorXd got = sigmas_of<double>(root);
  double largest = 0.0;
  for (Index j = 0; j < got.size(); ++j) {
    const double error = std::abs(got(j) / static_cast<double>(truth(j)) - 1.0);
    largest = std::isnan(error) ? HUGE_VAL : std::max(largest, error);
  }
  return largest;
}

/// The largest difference between elements, in units of the largest in their row of `truth`.
double row_error(const MatrixXd& root, const MatrixXd& truth) {
  if (!root.allFinite()) return HUGE_VAL;
  double largest = 0.0;
  for (Index i = 0; i < root.rows(); ++i) {
    const double error =
        (root.row(i) - truth.row(i)).cwiseAbs().maxCoeff() / truth.row(i).cwiseAbs().maxCoeff();
    largest = std::max(largest, error);
  }
  return largest;
}

/// Upper triangular to the last bit, and not negative on the diagonal.
bool is_root(const MatrixXd& root) {
  return root.isUpperTriangular(0.0) && (root.diagonal().array() >= 0.0).all();
}

MatrixXd powers(Index rows, Index columns, double from, double to) {
  MatrixXd all(rows, columns);
  for (Index i = 0; i < rows; ++i) {
    const double x = from + (to - from) * static_cast<double>(i) / static_cast<double>(rows - 1);
    for (Index j = 0; j < columns; ++j) all(i, j) = j == 0 ? 1.0 : all(i, j - 1) * x;
  }
  return all;
}

}  // namespace

TEST_CASE("The root of two rows is the one found by hand") {
  // By hand: F = [25 11; 11 5], so R = [5 11/5; 0 2/5].
  for (const double sign : {1.0, -1.0}) {
    const MatrixXd root = root_of(MatrixXd{{sign * 3.0, sign * 1.0}, {4.0, 2.0}});
    CHECK(root(0, 0) == close_to(5.0, 1e-15));
    CHECK(root(1, 0) == 0.0);
    CHECK(root(0, 1) == close_to((sign * sign * 3.0 + 8.0) / 5.0, 1e-15));
    CHECK(root(1, 1) == close_to(0.4, 1e-14));
  }
}

TEST_CASE("R^T R is W^T W, and R is that of Eigen's QR, for any number of columns") {
  for (const Index columns : {1, 2, 7, 8, 9, 16, 37, 50}) {
    const MatrixXd rows = normal(1500, columns, 1);
    const MatrixXd root = root_of(rows);
    CHECK(is_root(root));
    MatrixXd fisher = MatrixXd::Zero(columns, columns);
    fisher.selfadjointView<Eigen::Upper>().rankUpdate(rows.transpose());
    const MatrixXd whole = fisher.selfadjointView<Eigen::Upper>();
    CHECK((root.transpose() * root - whole).norm() <= 1e-14 * whole.norm());
    const MatrixXd peer = Eigen::HouseholderQR<MatrixXd>(rows).matrixQR().topRows(columns);
    for (Index j = 0; j < columns; ++j) {
      const double sign = peer(j, j) < 0.0 ? -1.0 : 1.0;
      const VectorXd difference = (root.row(j) - sign * peer.row(j)).tail(columns - j).transpose();
      CHECK(difference.norm() <= 1e-13 * root.norm());
    }
  }
}

TEST_CASE("Where W^T W has no digit left, the root still gives sigma") {
  const MatrixXd rows = powers(60, 10, 3.0, 8.0);  // condition of R 1e10, of F 1e20
  CHECK(sigma_error(root_of(rows), rows) < 1e-7);
  CHECK(sigma_error(root_of_pieces(rows, 23), rows) < 1e-7);
  CHECK(sigma_error(root_of_pieces(rows, 1), rows) < 1e-7);
  const MatrixXd stream = powers(3000, 10, 3.0, 8.0);  // extrapolates from chunk to chunk
  CHECK(sigma_error(root_of(stream), stream) < 1e-7);
}

TEST_CASE("Rows in pieces of any size give the root of all at once") {
  const MatrixXd rows = normal(900, 12, 2);
  const MatrixXd whole = root_of(rows);
  for (const Index each : {1, 2, 11, 12, 13, 350, 407, 408, 409, 900}) {
    const MatrixXd root = root_of_pieces(rows, each);
    CHECK(is_root(root));
    CHECK(row_error(root, whole) < 1e-13);
  }
}

TEST_CASE("Roots merge in any order") {
  const MatrixXd rows = normal(600, 9, 3);
  const MatrixXd first = root_of(rows.topRows(400)), second = root_of(rows.bottomRows(200));
  MatrixXd one = first, other = second;
  fold_rows<double>(one, second);
  fold_rows<double>(other, first);
  CHECK(row_error(one, root_of(rows)) < 1e-13);
  CHECK(row_error(other, one) < 1e-13);
}

TEST_CASE("Fewer rows than columns leave zeros at the end of the diagonal") {
  const MatrixXd rows = normal(3, 11, 4);
  const MatrixXd root = root_of(rows);
  CHECK(is_root(root));
  CHECK(root.bottomRows(8).isZero(0.0));
  CHECK((root.transpose() * root - rows.transpose() * rows).norm() < 1e-14 * rows.squaredNorm());
}

TEST_CASE("No rows and rows of zeros change no bit, and a column of zeros stays one") {
  MatrixXd root = root_of(normal(30, 10, 5));
  const MatrixXd before = root;
  fold_rows<double>(root, MatrixXd(0, 10));
  fold_rows<double>(root, MatrixXd::Zero(5, 10));
  CHECK(root == before);

  MatrixXd rows = normal(500, 10, 6);
  rows.col(0).setZero();
  rows.col(4).setZero();
  const MatrixXd with_zeros = root_of(rows);
  CHECK(is_root(with_zeros));
  CHECK(with_zeros.col(0).isZero(0.0));
  CHECK(with_zeros.col(4).isZero(0.0));
  std::vector<Index> others{1, 2, 3, 5, 6, 7, 8, 9};
  const MatrixXd without = root_of(rows(Eigen::all, others));
  CHECK(row_error(with_zeros(others, others), without) < 1e-13);

  MatrixXd none(0, 0);
  fold_rows<double>(none, MatrixXd(7, 0));
  CHECK(none.size() == 0);
}

TEST_CASE("The sign of a row does not matter") {
  const MatrixXd rows = normal(400, 10, 7);
  CHECK(is_root(root_of(-rows)));
  CHECK(row_error(root_of(-rows), root_of(rows)) < 1e-14);
}

TEST_CASE("A row of any weight among light ones costs no digit, wherever it stands") {
  for (const double weight : {1e5, 1e10, 1e15}) {
    for (const Index place : {0, 150, 407, 408, 650, 999}) {
      MatrixXd rows = normal(1000, 6, 8);
      rows.row(place) *= weight;
      CHECK(sigma_error(root_of(rows), rows) < 1e-13);
      CHECK(sigma_error(root_of_pieces(rows, 1), rows) < 1e-13);
    }
  }
}

TEST_CASE("A heavy row that does not touch the first parameters costs no digit") {
  for (const double weight : {1e5, 1e10, 1e15}) {
    MatrixXd rows = normal(1000, 4, 9);
    rows.row(10) << 0.0, weight, weight, 0.0;
    CHECK(sigma_error(root_of(rows), rows) < 1e-13);
    rows.row(999) << weight, -weight, weight, 0.0;
    CHECK(sigma_error(root_of(rows), rows) < 1e-13);
    CHECK(sigma_error(root_of_pieces(rows, 1), rows) < 1e-13);
  }
}

TEST_CASE("Heavy rows of single parameters may come before, between or after the data") {
  const MatrixXd data = normal(1000, 6, 10);
  for (const double weight : {1e4, 1e9, 1e15}) {
    MatrixXd priors = MatrixXd::Zero(3, 6);
    priors(0, 1) = weight;
    priors(1, 3) = -weight;
    priors(2, 4) = 0.01 * weight;
    MatrixXd rows(1003, 6);
    rows << priors, data;
    const MatrixXd truth = root_of<Wide>(rows).cast<double>();
    const auto check = [&](const std::vector<MatrixXd>& pieces) {
      MatrixXd root = MatrixXd::Zero(6, 6);
      for (const MatrixXd& piece : pieces) fold_rows<double>(root, piece);
      CHECK(row_error(root, truth) < 1e-13);
    };
    check({rows});
    check({priors, data});
    check({data, priors});
    check({data.topRows(500), priors, data.bottomRows(500)});
    check({priors.row(2), data, priors.row(0), priors.row(1)});
    check({root_of(data), root_of(priors)});
    check({root_of(priors), root_of(data)});
  }
}

TEST_CASE("Weights that spread over many decades cost no digit, in whatever order") {
  for (const double decades : {8.0, 15.0}) {
    for (const int order : {0, 1, 2}) {
      MatrixXd rows = normal(1000, 20, 11);
      for (Index i = 0; i < rows.rows(); ++i) {
        const double part = static_cast<double>(order == 0 ? i * 613 % 1000 : i) / 999.0;
        rows.row(i) *= std::pow(10.0, order == 2 ? -decades * part : decades * part);
      }
      CHECK(sigma_error(root_of(rows), rows) < 1e-13);
    }
  }
}

TEST_CASE("Sparse rows of weights drawn over twelve decades keep all sigmas") {
  for (unsigned seed = 0; seed < 100; ++seed) {
    std::mt19937 generator(seed);
    std::uniform_real_distribution<double> uniform;
    MatrixXd rows = normal(10 + seed, 2 + seed % 9, 100 + seed);
    const double sparsity = 0.5 * uniform(generator);
    for (Index i = 0; i < rows.rows(); ++i) {
      for (Index j = 0; j < rows.cols(); ++j) {
        if (uniform(generator) < sparsity) rows(i, j) = 0.0;
      }
      rows.row(i) *= std::pow(10.0, 12.0 * uniform(generator));
    }
    CAPTURE(seed);
    CHECK(sigma_error(root_of(rows), rows) < 1e-10);
    CHECK(sigma_error(root_of_pieces(rows, 1), rows) < 1e-10);
  }
}

TEST_CASE("Scaling a column by a power of two scales that column of R without rounding") {
  MatrixXd rows = normal(900, 13, 12);
  rows.row(400) *= 1e9;
  const MatrixXd plain = root_of(rows);
  for (const Index j : {0, 5, 8, 12}) {
    for (const int exponent : {-100, 7, 100}) {
      MatrixXd scaled = rows, expected = plain;
      scaled.col(j) *= std::ldexp(1.0, exponent);
      expected.col(j).head(j) *= std::ldexp(1.0, exponent);
      expected(j, j) *= std::ldexp(1.0, exponent);
      CHECK(root_of(scaled) == expected);
    }
  }
}

TEST_CASE("Scaling a column by 1e12 or 1e-12 scales its sigma and no other") {
  const MatrixXd rows = normal(500, 10, 13);
  const VectorXd plain = sigmas_of<double>(root_of(rows));
  for (const Index scaled : {0, 4, 9}) {
    for (const double factor : {1e12, 1e-12}) {
      MatrixXd changed = rows;
      changed.col(scaled) *= factor;
      const VectorXd sigmas = sigmas_of<double>(root_of(changed));
      for (Index j = 0; j < 10; ++j) {
        CHECK(sigmas(j) == close_to(plain(j) / (j == scaled ? factor : 1.0), 1e-12));
      }
    }
  }
}

TEST_CASE("Columns whose squares under- or overflow are folded like any other") {
  const MatrixXd rows = normal(1000, 10, 14);
  const MatrixXd plain = root_of(rows);
  VectorXd sizes(10);
  sizes << 1e-170, 1.0, 1e160, 1e-240, 1e240, 1e-60, 1e60, 1e-100, 1e100, 1e-200;
  for (int turn = 0; turn < 2; ++turn, sizes.reverseInPlace()) {
    for (const Index each : {1, 100, 1000}) {
      MatrixXd root = root_of_pieces(rows * sizes.asDiagonal(), each);
      CHECK(is_root(root));
      for (Index j = 0; j < 10; ++j) root.col(j) /= sizes(j);
      CHECK(row_error(root, plain) < 1e-13);
    }
  }
}

TEST_CASE("A NaN or an infinity anywhere shows in R") {
  const double nan = std::numeric_limits<double>::quiet_NaN();
  for (const double bad : {nan, HUGE_VAL, -HUGE_VAL}) {
    for (const Index i : {0, 200, 499}) {
      for (const Index j : {0, 3, 8, 11}) {
        MatrixXd rows = normal(500, 12, 15);
        rows(i, j) = bad;
        CHECK_FALSE(root_of(rows).allFinite());
        CHECK_FALSE(root_of_pieces(rows, 1).allFinite());
      }
    }
  }
}

TEST_CASE("The kernel works in long double and in fifty digits") {
  const MatrixXd rows = normal(40, 11, 16);
  const MatrixOf<Wide> wide = root_of<Wide>(rows), exact = rows.cast<Wide>();
  CHECK(static_cast<double>((wide.transpose() * wide - exact.transpose() * exact).norm()) < 1e-46);
  const MatrixOf<long double> longer = root_of<long double>(rows);
  const MatrixOf<long double> truth = wide.cast<long double>();
  CHECK(static_cast<double>((longer - truth).norm()) < 1e-16);
}

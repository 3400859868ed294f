#pragma once
/// Which directions of parameter space an information does not measure above its numerical error.

#include <algorithm>
#include <cmath>
#include <limits>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/information/error_sources.hpp>
#include <whet/support/householder.hpp>

namespace whet::detail {

/// Directions x that are not measured to numerical accuracy, |R x| <= bound(x), each with the row k
/// (k x = 1, k x' = 0 for the others) that fixes it.
template <class Real>
struct NullSpace {
  MatrixOf<Real> directions{};    ///< P x K, x in the units of the parameters
  MatrixOf<Real> fixing{};        ///< K x P, k
  VectorOf<Real> stiffness{};     ///< K, beta: beta k measures x as sharply as a typical column is
  std::vector<double> bounds{};   ///< bound(x)
  std::vector<double> lengths{};  ///< |R x|
  VectorOf<Real> scales{};        ///< P, s: the error of each column, to a power of two

  [[nodiscard]] Eigen::Index size() const noexcept { return directions.cols(); }
};

/// The root of rows given all at once.
template <class Real>
[[nodiscard]] MatrixOf<Real> root_of(const MatrixOf<Real>& rows) {
  MatrixOf<Real> root = MatrixOf<Real>::Zero(rows.cols(), rows.cols());
  fold_rows<Real>(root, rows);
  return root;
}

/// rows (1 - taken fixing): the rows with the directions `taken` taken as exactly null.
template <class Real>
[[nodiscard]] MatrixOf<Real> without(const MatrixOf<Real>& rows, const MatrixOf<Real>& taken,
                                     const MatrixOf<Real>& fixing) {
  return rows - product<Real>(product<Real>(rows, taken), fixing);
}

/// The right singular vector of the least singular value of a triangle, by inverse iteration. A
/// zero on the diagonal is taken as rounding of its column.
template <class Real>
[[nodiscard]] MatrixOf<Real> least_direction(MatrixOf<Real> triangle) {
  using std::abs;
  using std::sqrt;
  const Real eps = std::numeric_limits<Real>::epsilon();
  const Eigen::Index count = triangle.cols();
  const VectorOf<Real> norms = column_norms<Real>(triangle);
  for (Eigen::Index j = 0; j < count; ++j) {
    if (abs(triangle(j, j)) < eps * norms(j)) triangle(j, j) = eps * norms(j);
  }
  MatrixOf<Real> v(count, 1);
  // Any start with a part along the answer will do; this one is no eigenvector of a symmetric case.
  for (Eigen::Index j = 0; j < count; ++j)
    v(j, 0) = Real(1) + Real(static_cast<int>(j % 7)) / Real(9);
  Real growth(0);
  for (int iteration = 0; iteration < 40; ++iteration) {
    v = upper_solution<Real>(triangle, transposed_upper_solution<Real>(triangle, std::move(v)));
    const Real length = column_norms<Real>(v)(0);
    v /= length;
    // Within a cluster of small singular values any vector serves: stop when the value settles.
    if (iteration >= 3 && length <= growth * (Real(1) + Real(1) / Real(1000))) break;
    growth = length;
  }
  return v;
}

/// The power of two next to a positive scale: dividing by it does not round.
template <class Real>
[[nodiscard]] Real power_of_two(const Real& scale) {
  using std::frexp;
  using std::ldexp;
  int exponent = 0;
  (void)frexp(scale, &exponent);
  return ldexp(Real(1), exponent);
}

/// Find the directions that are not measured above the errors. The rule does not change with the
/// units of the parameters: each column is divided by its own error.
template <class Real>
[[nodiscard]] NullSpace<Real> find_null_space(const MatrixOf<Real>& root,
                                              const NumericalErrors& errors) {
  using std::sqrt;
  const Eigen::Index count = root.cols();
  const Real rounding =
      Real(8) * Real(static_cast<double>(count)) * std::numeric_limits<Real>::epsilon();
  const VectorOf<Real> norms = column_norms<Real>(root);
  const Eigen::VectorXd column_errors = errors.of_each_column();
  VectorOf<Real> scales(count), rounded(count);
  for (Eigen::Index p = 0; p < count; ++p) {
    rounded(p) = rounding * norms(p);
    const Real error = Real(column_errors(p));
    const Real scale = error > rounded(p) ? error : rounded(p);
    scales(p) = norms(p) > Real(0) ? power_of_two<Real>(scale) : Real(1);
  }
  MatrixOf<Real> scaled(root.rows(), count);
  for (Eigen::Index p = 0; p < count; ++p) scaled.col(p) = root.col(p) / scales(p);
  const VectorOf<Real> scaled_norms = column_norms<Real>(scaled);
  const Real stiffest = count > 0 ? std::max(Real(1), Real(scaled_norms.maxCoeff())) : Real(1);

  MatrixOf<Real> found(count, 0), fixed_rows(0, count);
  NullSpace<Real> null;
  null.scales = scales;
  std::vector<Real> stiffness;
  const auto add = [&](const VectorOf<Real>& v, double length, double bound) {
    Real square(0);
    for (Eigen::Index p = 0; p < count; ++p) {
      const Real part = v(p) * scaled_norms(p);
      square += part * part;
    }
    // As stiff as a typical column; a column of pure error is softer than its own bound.
    Real beta = std::max(Real(sqrt(square)), Real(bound));
    if (!(beta > Real(0))) beta = Real(1);
    stiffness.push_back(beta);
    found.conservativeResize(count, found.cols() + 1);
    found.col(found.cols() - 1) = v;
    fixed_rows.conservativeResize(fixed_rows.rows() + 1, count);
    // In the search as stiff as the stiffest column: else it would be found again.
    for (Eigen::Index p = 0; p < count; ++p) fixed_rows(fixed_rows.rows() - 1, p) = stiffest * v(p);
    null.lengths.push_back(length);
    null.bounds.push_back(bound);
  };

  for (Eigen::Index p = 0; p < count; ++p) {
    if (norms(p) > Real(0)) continue;
    add(VectorOf<Real>::Unit(count, p), 0.0, errors.bound(Eigen::VectorXd::Unit(count, p)));
  }
  while (found.cols() < count) {
    MatrixOf<Real> rows(scaled.rows() + fixed_rows.rows(), count);
    rows << without<Real>(scaled, found, transposed<Real>(found)), fixed_rows;
    MatrixOf<Real> direction =
        least_direction<Real>(found.cols() == 0 ? scaled : root_of<Real>(rows));
    direction -= product<Real>(found, transposed_product<Real>(found, direction));
    direction /= column_norms<Real>(direction)(0);
    const VectorOf<Real> v = direction.col(0);
    const auto length =
        static_cast<double>(column_norms<Real>(product<Real>(scaled, direction))(0));
    Eigen::VectorXd x(count);
    Real rounds(0);
    for (Eigen::Index p = 0; p < count; ++p) {
      const Real part = v(p) / scales(p);
      x(p) = static_cast<double>(part);
      rounds += rounded(p) * part * rounded(p) * part;
    }
    const double bound = errors.bound(x) + static_cast<double>(sqrt(rounds));
    if (!(length <= bound)) break;
    add(v, length, bound);
  }

  null.directions = found;
  null.fixing = transposed<Real>(found);
  null.stiffness.resize(found.cols());
  for (Eigen::Index k = 0; k < found.cols(); ++k) {
    null.stiffness(k) = stiffness[static_cast<std::size_t>(k)];
    for (Eigen::Index p = 0; p < count; ++p) {
      null.directions(p, k) /= scales(p);
      null.fixing(k, p) *= scales(p);
    }
  }
  return null;
}

/// The rows with the null directions taken as exactly null, and each fixed by a row of its own:
/// whatever does not depend on them keeps its sigma. Columns beyond the P of the null space
/// (shifts) ride along.
template <class Real>
[[nodiscard]] MatrixOf<Real> with_null_space_fixed(const MatrixOf<Real>& root,
                                                   const NullSpace<Real>& null) {
  if (null.size() == 0) return root;
  const Eigen::Index count = null.fixing.cols();
  MatrixOf<Real> rows = MatrixOf<Real>::Zero(root.rows() + null.size(), root.cols());
  rows.topRows(root.rows()) = root;
  rows.topLeftCorner(root.rows(), count) =
      without<Real>(leading<Real>(root, root.rows(), count), null.directions, null.fixing);
  for (Eigen::Index k = 0; k < null.size(); ++k) {
    for (Eigen::Index p = 0; p < count; ++p) {
      rows(root.rows() + k, p) = null.stiffness(k) * null.fixing(k, p);
    }
  }
  return root_of<Real>(rows);
}

}  // namespace whet::detail

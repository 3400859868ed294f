#pragma once
/// Products and triangular solutions of small matrices.
///
/// Plain loops on purpose: Eigen's own products and solutions are made for large matrices and each
/// form of expression costs every file that includes whet a part of a second to compile.

#include <cmath>
#include <vector>

#include <Eigen/Core>

namespace whet::detail {

template <class Real>
using MatrixOf = Eigen::Matrix<Real, Eigen::Dynamic, Eigen::Dynamic>;
template <class Real>
using VectorOf = Eigen::Matrix<Real, Eigen::Dynamic, 1>;

/// a b
template <class Real>
[[nodiscard]] MatrixOf<Real> product(const MatrixOf<Real>& a, const MatrixOf<Real>& b) {
  MatrixOf<Real> result = MatrixOf<Real>::Zero(a.rows(), b.cols());
  for (Eigen::Index j = 0; j < b.cols(); ++j) {
    for (Eigen::Index k = 0; k < a.cols(); ++k) {
      const Real factor = b(k, j);
      if (factor == Real(0)) continue;
      for (Eigen::Index i = 0; i < a.rows(); ++i) result(i, j) += a(i, k) * factor;
    }
  }
  return result;
}

/// a^T b
template <class Real>
[[nodiscard]] MatrixOf<Real> transposed_product(const MatrixOf<Real>& a, const MatrixOf<Real>& b) {
  MatrixOf<Real> result(a.cols(), b.cols());
  for (Eigen::Index j = 0; j < b.cols(); ++j) {
    for (Eigen::Index i = 0; i < a.cols(); ++i) {
      Real sum(0);
      for (Eigen::Index k = 0; k < a.rows(); ++k) sum += a(k, i) * b(k, j);
      result(i, j) = sum;
    }
  }
  return result;
}

template <class Real>
[[nodiscard]] MatrixOf<Real> transposed(const MatrixOf<Real>& a) {
  MatrixOf<Real> result(a.cols(), a.rows());
  for (Eigen::Index j = 0; j < a.cols(); ++j) {
    for (Eigen::Index i = 0; i < a.rows(); ++i) result(j, i) = a(i, j);
  }
  return result;
}

/// R^-1 b for an upper triangle R, the first columns of `triangle` as far as b has rows.
template <class Real>
[[nodiscard]] MatrixOf<Real> upper_solution(const MatrixOf<Real>& triangle, MatrixOf<Real> b) {
  for (Eigen::Index j = 0; j < b.cols(); ++j) {
    for (Eigen::Index k = b.rows() - 1; k >= 0; --k) {
      if (b(k, j) == Real(0)) continue;
      const Real part = b(k, j) / triangle(k, k);
      b(k, j) = part;
      for (Eigen::Index i = 0; i < k; ++i) b(i, j) -= part * triangle(i, k);
    }
  }
  return b;
}

/// R^-T b for an upper triangle R.
template <class Real>
[[nodiscard]] MatrixOf<Real> transposed_upper_solution(const MatrixOf<Real>& triangle,
                                                       MatrixOf<Real> b) {
  for (Eigen::Index j = 0; j < b.cols(); ++j) {
    for (Eigen::Index k = 0; k < b.rows(); ++k) {
      for (Eigen::Index i = 0; i < k; ++i) b(k, j) -= triangle(i, k) * b(i, j);
      b(k, j) /= triangle(k, k);
    }
  }
  return b;
}

/// These columns, in this order.
template <class Real>
[[nodiscard]] MatrixOf<Real> columns_of(const MatrixOf<Real>& matrix,
                                        const std::vector<Eigen::Index>& which) {
  MatrixOf<Real> chosen(matrix.rows(), static_cast<Eigen::Index>(which.size()));
  for (std::size_t j = 0; j < which.size(); ++j) {
    chosen.col(static_cast<Eigen::Index>(j)) = matrix.col(which[j]);
  }
  return chosen;
}

/// The leading rows and columns, and a block of columns, as matrices of their own.
template <class Real>
[[nodiscard]] MatrixOf<Real> leading(const MatrixOf<Real>& matrix, Eigen::Index rows,
                                     Eigen::Index columns) {
  return matrix.topLeftCorner(rows, columns);
}

/// Norm of each column, of any size: no square over- or underflows.
template <class Real>
[[nodiscard]] VectorOf<Real> column_norms(const MatrixOf<Real>& matrix) {
  using std::abs;
  using std::sqrt;
  VectorOf<Real> norms(matrix.cols());
  for (Eigen::Index j = 0; j < matrix.cols(); ++j) {
    Real largest(0), squares(0);
    for (Eigen::Index i = 0; i < matrix.rows(); ++i) {
      const Real size = abs(matrix(i, j));
      if (!(size <= largest)) largest = size;  // a NaN stays
    }
    for (Eigen::Index i = 0; i < matrix.rows() && largest > Real(0); ++i) {
      const Real part = matrix(i, j) / largest;
      squares += part * part;
    }
    norms(j) = largest > Real(0) ? Real(largest * sqrt(squares)) : largest;
  }
  return norms;
}

}  // namespace whet::detail

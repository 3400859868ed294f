#pragma once
/// Whitened rows of information that comes as a covariance of parameters, with their errors.

#include <algorithm>
#include <cmath>
#include <limits>
#include <string>
#include <utility>

#include <Eigen/Core>

#include <whet/covariances/dense_covariance.hpp>
#include <whet/information/error_sources.hpp>
#include <whet/support/algebra.hpp>
#include <whet/support/error.hpp>

namespace whet::detail {

/// What |dF_pq| can be relative to sqrt(F_pp F_qq), in a matrix whose elements are off by a factor
/// 1 +- error from one that is semidefinite: that, the rounding of its factorisation, and what its
/// triangles differ by.
template <class Real>
[[nodiscard]] double element_error(const MatrixOf<Real>& matrix, double error) {
  double apart = 0.0;
  for (Eigen::Index j = 0; j < matrix.cols(); ++j) {
    for (Eigen::Index i = 0; i < j; ++i) {
      const double difference = std::abs(matrix(i, j) - matrix(j, i));
      if (difference == 0.0) continue;
      apart = std::max(apart, difference / std::sqrt(matrix(i, i)) / std::sqrt(matrix(j, j)));
    }
  }
  return error * (1.0 + error) / (1.0 - error) + 0.5 * apart +
         static_cast<double>(matrix.rows()) * std::numeric_limits<double>::epsilon();
}

/// Rows W = L^-1 of a covariance C = L L^T, and how far they are off.
struct CovarianceRows {
  Eigen::MatrixXd rows{};
  NumericalErrors errors{};
};

/// @param error  of each element, relative to it
/// @throws CovarianceError as DenseCovariance, or if the errors could make C singular
template <class Real>
[[nodiscard]] CovarianceRows rows_of_covariance(const std::string& where,
                                                const MatrixOf<Real>& covariance, double error) {
  const Eigen::Index count = covariance.rows();
  const BasicDenseCovariance<Real> noise(covariance);
  CovarianceRows result{noise.whiten(MatrixOf<Real>::Identity(count, count)), {}};
  const Eigen::VectorXd norms = column_norms<double>(result.rows);
  // |dC_pq| <= g_p g_q. In units of the rows, D = W dC W^T has |D| <= d = (sum_q g_q |W_q|)^2, and
  // dF = -W^T (D - D (1 + D)^-1 D) W, so that |x^T dF x| <= (sum_q g_q |(F x)_q|)^2 / (1 - d).
  Eigen::VectorXd sizes =
      std::sqrt(element_error<Real>(covariance, error)) * covariance.diagonal().cwiseSqrt();
  const double d = std::pow(sizes.dot(norms), 2);
  if (!(d < 1.0)) {
    fail<CovarianceError>({.where = where,
                           .what = "the covariance",
                           .got = "one that may be singular within the errors of its elements",
                           .expected = "one that is positive definite whatever digits follow",
                           .advice = "Give more digits, or the Fisher matrix."});
  }
  sizes /= std::sqrt(1.0 - d);
  // Beside, the rounding of the rows, by the condition number of L.
  const double rounding =
      8.0 * std::numeric_limits<double>::epsilon() * std::sqrt(noise.condition());
  result.errors.columns = ErrorSources::of_columns(rounding * norms);
  result.errors.matrices.push_back({std::move(sizes),
                                    transposed_product<double>(result.rows, result.rows),
                                    Eigen::VectorXd::Zero(count)});
  return result;
}

}  // namespace whet::detail

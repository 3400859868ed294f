#pragma once
/// Covariance of data that are correlated in any way.

#include <cmath>
#include <limits>
#include <memory>
#include <mutex>
#include <string>
#include <utility>

#include <Eigen/Cholesky>
#include <Eigen/Core>

#include <whet/support/algebra.hpp>
#include <whet/support/error.hpp>

namespace whet {

/// A symmetric positive-definite covariance C of n data, held as a Cholesky factor of the
/// correlation matrix. A template so that only those pay for the factorisation who use it. An
/// immutable value, cheap to copy: copies share the factor.
template <class Real>
class BasicDenseCovariance {
 public:
  using Matrix = detail::MatrixOf<Real>;
  using Vector = detail::VectorOf<Real>;

  /// @param matrix  n x n, element (i, j) in unit of datum i times unit of datum j. Both triangles
  ///   are read; they may differ by rounding (1e-10 of the standard deviations).
  /// @throws CovarianceError if it is empty, not square, not finite, not symmetric (naming the
  /// pair),
  ///   has a variance <= 0, or is not positive definite to rounding
  explicit BasicDenseCovariance(const Eigen::Ref<const Matrix>& matrix)
      : shared_(std::make_shared<const Shared>(matrix)) {}

  /// Number of data, n.
  [[nodiscard]] Eigen::Index size() const noexcept { return shared_->deviations.size(); }

  /// L^-1 rows for C = L L^T, giving rows whose covariance is the identity.
  /// @param rows  n x m, row i in the unit of datum i
  /// @return      n x m, owning; W with W^T W = rows^T C^-1 rows
  /// @throws CovarianceError unless rows.rows() == size()
  [[nodiscard]] Matrix whiten(const Eigen::Ref<const Matrix>& rows) const {
    if (rows.rows() != size()) {
      detail::fail<CovarianceError>({.where = "DenseCovariance::whiten",
                                     .what = "number of rows",
                                     .got = detail::text(rows.rows()),
                                     .expected = detail::text(size()),
                                     .advice = "Give one row per datum."});
    }
    Matrix whitened = rows.array().colwise() / shared_->deviations.array();
    shared_->correlation.matrixL().solveInPlace(whitened);
    return whitened;
  }

  /// A bound on the whitened length of an error of these sizes, whatever its signs:
  /// sum_i errors_i sqrt((C^-1)_ii). Under strong correlation the pattern of signs alone can be a
  /// large factor.
  [[nodiscard]] double bound(const Vector& errors) const {
    return errors.cwiseAbs().dot(shared_->precisions());
  }
  /// The root mean square of the whitened length of errors that are independent from element to
  /// element, to one standard deviation: sqrt(sum_i errors_i^2 (C^-1)_ii).
  [[nodiscard]] double independent_length(const Vector& errors) const {
    return errors.cwiseProduct(shared_->precisions()).norm();
  }
  /// A bound on their largest standard deviation along any direction: the same.
  [[nodiscard]] double independent_bound(const Vector& errors) const {
    return independent_length(errors);
  }
  /// Condition number of the correlation matrix, an estimate in the 1-norm.
  [[nodiscard]] double condition() const noexcept { return shared_->condition; }

 private:
  struct Shared {
    explicit Shared(const Eigen::Ref<const Matrix>& matrix) {
      check(matrix);
      deviations = matrix.diagonal().cwiseSqrt();
      const Vector scale = deviations.cwiseInverse();
      // The mean of both triangles, which rounding may have left apart.
      const Matrix scaled = scale.asDiagonal() * matrix * scale.asDiagonal();
      correlation.compute(Real(0.5) * (scaled + scaled.transpose()));
      const double reciprocal = correlation.info() == Eigen::Success ? correlation.rcond() : 0.0;
      const double least =
          std::numeric_limits<double>::epsilon() * static_cast<double>(matrix.rows());
      if (!(reciprocal > least)) {
        refuse("the matrix", "one with no positive least eigenvalue to rounding",
               "a positive definite matrix",
               "A sum of fewer independent terms than data is singular: model common modes as "
               "parameters with priors instead.");
      }
      condition = 1.0 / reciprocal;
    }

    static void check(const Eigen::Ref<const Matrix>& matrix) {
      const Eigen::Index n = matrix.rows();
      if (n == 0 || matrix.cols() != n) {
        refuse("shape", detail::text(n) + " x " + detail::text(matrix.cols()),
               "a square matrix, one row and column per datum", "");
      }
      for (Eigen::Index i = 0; i < n; ++i) {
        if (!(std::isfinite(matrix(i, i)) && matrix(i, i) > 0.0)) {
          refuse("variance of element " + detail::text(i), detail::text(matrix(i, i)),
                 "a finite value > 0", "Leave out a datum that was not measured.");
        }
      }
      for (Eigen::Index j = 0; j < n; ++j) {
        for (Eigen::Index i = 0; i < j; ++i) {
          const double upper = matrix(i, j), lower = matrix(j, i);
          const double size = std::sqrt(matrix(i, i)) * std::sqrt(matrix(j, j));
          if (std::abs(upper - lower) <= 1e-10 * size) continue;  // false for a NaN
          refuse("elements (" + detail::text(i) + ", " + detail::text(j) + ") and (" +
                     detail::text(j) + ", " + detail::text(i) + ")",
                 detail::text(upper) + " and " + detail::text(lower),
                 "equal finite values: a covariance is symmetric", "");
        }
      }
    }

    [[noreturn]] static void refuse(std::string what, std::string got, std::string expected,
                                    std::string advice) {
      detail::fail<CovarianceError>({.where = "DenseCovariance",
                                     .what = std::move(what),
                                     .got = std::move(got),
                                     .expected = std::move(expected),
                                     .advice = std::move(advice)});
    }

    /// sqrt((C^-1)_ii), made when first asked for: it costs as much as the factor.
    const Vector& precisions() const {
      std::call_once(once, [this] {
        Matrix whitened = Matrix::Identity(deviations.size(), deviations.size());
        correlation.matrixL().solveInPlace(whitened);
        roots = whitened.colwise().norm().transpose().cwiseQuotient(deviations);
      });
      return roots;
    }

    Vector deviations{};
    Eigen::LLT<Matrix> correlation{};
    double condition{1.0};
    mutable std::once_flag once{};
    mutable Vector roots{};
  };

  std::shared_ptr<const Shared> shared_;
};

/// In double, what likelihoods use.
using DenseCovariance = BasicDenseCovariance<double>;

}  // namespace whet

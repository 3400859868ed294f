#pragma once
/// Covariance of independent data: only the diagonal is non-zero.

#include <cmath>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/support/error.hpp>

namespace whet {

/// The covariance C = diag(s_1^2 ... s_n^2) of n independent data, held as the s_i > 0.
/// An immutable value. No s_i is rounded to zero: data in any unit are treated alike.
class DiagonalCovariance {
 public:
  /// One standard deviation per datum, each in the unit of its datum.
  /// @throws CovarianceError naming the first entry that is not finite and positive, or if there is
  ///   none
  [[nodiscard]] static DiagonalCovariance from_standard_deviations(
      const Eigen::Ref<const Eigen::VectorXd>& deviations) {
    if (deviations.size() == 0) refuse("number of data", "0", "at least one");
    for (Eigen::Index i = 0; i < deviations.size(); ++i) {
      if (std::isfinite(deviations(i)) && deviations(i) > 0.0) continue;
      refuse("element " + detail::text(i), detail::text(deviations(i)), "a finite value > 0");
    }
    return DiagonalCovariance(deviations);
  }
  [[nodiscard]] static DiagonalCovariance from_standard_deviations(
      const std::vector<double>& deviations) {
    return from_standard_deviations(Eigen::Map<const Eigen::VectorXd>(
        deviations.data(), static_cast<Eigen::Index>(deviations.size())));
  }

  /// n data of the same standard deviation.
  /// @throws CovarianceError if n < 1, or the standard deviation is not finite and positive
  [[nodiscard]] static DiagonalCovariance uniform(Eigen::Index n, double deviation) {
    return from_standard_deviations(Eigen::VectorXd::Constant(n < 0 ? 0 : n, deviation).eval());
  }

  /// Number of data, n.
  [[nodiscard]] Eigen::Index size() const noexcept { return deviations_.size(); }
  /// The standard deviations, n, each in the unit of its datum.
  [[nodiscard]] const Eigen::VectorXd& standard_deviations() const noexcept { return deviations_; }

  /// Divide row i by s_i, giving rows whose covariance is the identity.
  /// @param rows  n x m, row i in the unit of datum i
  /// @return      n x m, owning; W with W^T W = rows^T C^-1 rows
  /// @throws CovarianceError unless rows.rows() == size()
  [[nodiscard]] Eigen::MatrixXd whiten(const Eigen::Ref<const Eigen::MatrixXd>& rows) const {
    if (rows.rows() != size()) {
      detail::fail<CovarianceError>({.where = "DiagonalCovariance::whiten",
                                     .what = "number of rows",
                                     .got = detail::text(rows.rows()),
                                     .expected = detail::text(size()),
                                     .advice = "Give one row per datum."});
    }
    return (rows.array().colwise() / deviations_.array()).matrix();
  }

  /// The whitened length of an error of these sizes, whatever its signs.
  [[nodiscard]] double bound(const Eigen::VectorXd& errors) const {
    return errors.cwiseQuotient(deviations_).norm();
  }
  /// The same for errors that are independent from element to element: the largest one.
  [[nodiscard]] double independent_bound(const Eigen::VectorXd& errors) const {
    return errors.cwiseQuotient(deviations_).cwiseAbs().maxCoeff();
  }
  /// The root mean square of the whitened length of such errors: the same as `bound`.
  [[nodiscard]] double independent_length(const Eigen::VectorXd& errors) const {
    return bound(errors);
  }
  [[nodiscard]] double condition() const noexcept { return 1.0; }

 private:
  explicit DiagonalCovariance(Eigen::VectorXd deviations) : deviations_(std::move(deviations)) {}
  [[noreturn]] static void refuse(std::string what, std::string got, std::string expected) {
    detail::fail<CovarianceError>({.where = "DiagonalCovariance",
                                   .what = std::move(what),
                                   .got = std::move(got),
                                   .expected = std::move(expected),
                                   .advice = "Leave out a datum that was not measured."});
  }

  Eigen::VectorXd deviations_;
};

}  // namespace whet

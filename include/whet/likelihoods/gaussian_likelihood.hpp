#pragma once
/// Gaussian data whose mean depends on the parameters.

#include <utility>

#include <Eigen/Core>

#include <whet/likelihoods/likelihood.hpp>

namespace whet {

/// Data d ~ N(mu(theta), C) with a fixed covariance C = L L^T: rows L^-1 dmu/dtheta, so that
/// F = dmu^T C^-1 dmu.
/// @tparam F  an Observable, or Derivatives in its place
/// @tparam C  a Covariance
template <class F, class C>
class GaussianLikelihood {
 public:
  static_assert(detail::require_response<F>());
  static_assert(Covariance<C>, "whet: the noise of a GaussianLikelihood must be a Covariance");

  /// @param mean        mu, n data, as an observable or as Derivatives
  /// @param covariance  of the n data
  GaussianLikelihood(F mean, C covariance)
      : mean_(std::move(mean)), covariance_(std::move(covariance)) {}

  [[nodiscard]] const F& response() const noexcept { return mean_; }

  /// @throws CovarianceError unless there is one variance a datum
  [[nodiscard]] const C& covariance(const Eigen::VectorXd& mean) const {
    if (covariance_.size() != mean.size()) {
      detail::fail<CovarianceError>(
          {.where = "GaussianLikelihood",
           .what = "size of the covariance",
           .got = detail::text(covariance_.size()),
           .expected = detail::text(mean.size()) + ", the length of the data vector"});
    }
    return covariance_;
  }

 private:
  F mean_;
  C covariance_;
};

}  // namespace whet

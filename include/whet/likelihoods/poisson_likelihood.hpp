#pragma once
/// Counts.

#include <utility>

#include <Eigen/Core>

#include <whet/covariances/diagonal_covariance.hpp>
#include <whet/likelihoods/likelihood.hpp>

namespace whet {

/// Independent counts n_i ~ Poisson(mu_i(theta)): rows dmu_i/dtheta / sqrt(mu_i), so that
/// F = sum_i dmu_i dmu_i^T / mu_i, exact for any mean.
/// @tparam F  an Observable, or Derivatives in its place
template <class F>
class PoissonLikelihood {
 public:
  static_assert(detail::require_response<F>());

  /// @param counts  mu, the expected counts of n bins, > 0 at the fiducial point
  explicit PoissonLikelihood(F counts) : counts_(std::move(counts)) {}

  [[nodiscard]] const F& response() const noexcept { return counts_; }

  /// @throws ObservableError naming a bin whose expected count is not positive
  [[nodiscard]] DiagonalCovariance covariance(const Eigen::VectorXd& mean) const {
    for (Eigen::Index i = 0; i < mean.size(); ++i) {
      if (mean(i) > 0.0) continue;
      detail::fail<ObservableError>({.where = "PoissonLikelihood",
                                     .what = "expected counts, element " + detail::text(i),
                                     .got = detail::text(mean(i)),
                                     .expected = "a value > 0",
                                     .advice = "Leave out bins in which nothing is expected."});
    }
    return DiagonalCovariance::from_standard_deviations(mean.cwiseSqrt().eval());
  }

 private:
  F counts_;
};

}  // namespace whet

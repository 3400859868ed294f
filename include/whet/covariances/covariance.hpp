#pragma once
/// What every covariance of the data can do.

#include <concepts>

#include <Eigen/Core>

namespace whet {

/// A covariance C = L L^T of n data. It whitens, and says how large an error can become when it is
/// whitened:
/// - `size()`: n;
/// - `whiten(rows)`: L^-1 rows, n x m;
/// - `bound(errors)`: the largest |L^-1 e| over all e with |e_i| <= errors_i, or a bound above it;
/// - `independent_bound(errors)`: the largest standard deviation of u^T L^-1 e over unit vectors u
///   where the e_i are independent with standard deviations errors_i, or a bound above it;
/// - `independent_length(errors)`: the root mean square of |L^-1 e| for such e;
/// - `condition()`: of C scaled to unit diagonal, by which whitening magnifies rounding.
template <class C>
concept Covariance = requires(const C& covariance, const Eigen::MatrixXd& rows,
                              const Eigen::VectorXd& errors) {
  { covariance.size() } -> std::convertible_to<Eigen::Index>;
  { covariance.whiten(rows) } -> std::same_as<Eigen::MatrixXd>;
  { covariance.bound(errors) } -> std::same_as<double>;
  { covariance.independent_bound(errors) } -> std::same_as<double>;
  { covariance.independent_length(errors) } -> std::same_as<double>;
  { covariance.condition() } -> std::same_as<double>;
};

}  // namespace whet

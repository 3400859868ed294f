#pragma once
/// What every likelihood gives the assembly: a response and the covariance of the data about it.

#include <string>
#include <utility>

#include <Eigen/Core>

#include <whet/covariances/covariance.hpp>
#include <whet/derivatives/derivatives.hpp>
#include <whet/observables/observable.hpp>
#include <whet/support/error.hpp>
#include <whet/support/function_ref.hpp>

namespace whet {

namespace detail {

/// An observable, or derivatives that stand in its place.
template <class F>
inline constexpr bool is_response = Observable<F> || std::is_same_v<F, Derivatives>;

/// As `require_observable`, for what a likelihood is given.
template <class F>
[[nodiscard]] constexpr bool require_response() {
  if constexpr (std::is_same_v<F, Derivatives>) {
    return true;
  } else {
    return require_observable<F>();
  }
}

}  // namespace detail

/// A likelihood turns derivatives of its response into whitened rows W with F = W^T W:
/// - `response()`: the observable whose derivatives are taken, or its Derivatives;
/// - `covariance(mean)`: a Covariance of the data where the response is `mean`, n.
template <class L>
concept Likelihood = requires(const L& likelihood, const Eigen::VectorXd& mean) {
  likelihood.response();
  requires Covariance<std::remove_cvref_t<decltype(likelihood.covariance(mean))>>;
};

}  // namespace whet

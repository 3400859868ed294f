#pragma once
/// The gamma function for dual numbers, apart because Boost.Math's polygamma takes as long to
/// compile as Eigen/Core; include it where an observable marked exact needs it.

#include <cmath>
#include <cstddef>

#include <boost/math/special_functions/digamma.hpp>
#include <boost/math/special_functions/polygamma.hpp>

#include <whet/derivatives/dual_functions.hpp>

namespace whet {

namespace detail {

/// The n-th derivative of the digamma function, n >= 0.
template <class T>
[[nodiscard]] T polygamma(int n, const T& x) {
  if constexpr (is_dual<T>) {
    using Real = typename T::Value;
    return chain<Real>(x, polygamma<Real>(n, x.value()), polygamma<Real>(n + 1, x.value()));
  } else {
    return n == 0 ? T(boost::math::digamma(x)) : T(boost::math::polygamma(n, x));
  }
}

}  // namespace detail

template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> tgamma(const Dual<Real, N>& x) {
  using std::tgamma;
  const Real value = tgamma(x.value());
  return detail::chain<Real>(x, value, value * detail::polygamma<Real>(0, x.value()));
}
/// ln |Gamma(x)|.
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> lgamma(const Dual<Real, N>& x) {
  using std::lgamma;
  return detail::chain<Real>(x, lgamma(x.value()), detail::polygamma<Real>(0, x.value()));
}

}  // namespace whet

#pragma once
/// The functions of <cmath> with kinks and steps, for dual numbers. Each takes the branch that its
/// value is on; at the kink itself it takes one in silence, and a step is flat.

#include <cmath>
#include <cstddef>

#include <whet/derivatives/dual.hpp>
#include <whet/derivatives/dual_chain.hpp>

namespace whet {

template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> fabs(const Dual<Real, N>& x) {
  using std::fabs;
  return detail::chain<Real>(x, fabs(x.value()), Real(x.value() < 0 ? -1 : 1));
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> abs(const Dual<Real, N>& x) {
  return fabs(x);
}
template <class A, class B, class D = detail::CommonDual<A, B>>
[[nodiscard]] D copysign(const A& a, const B& b) {
  const D &x = a, &y = b;
  return signbit(x) == signbit(y) ? x : -x;
}
template <class A, class B, class D = detail::CommonDual<A, B>>
[[nodiscard]] D fmin(const A& a, const B& b) {
  const D &x = a, &y = b;
  return isnan(x) || y < x ? y : x;
}
template <class A, class B, class D = detail::CommonDual<A, B>>
[[nodiscard]] D fmax(const A& a, const B& b) {
  const D &x = a, &y = b;
  return isnan(x) || x < y ? y : x;
}
/// x - n y, n the whole part of x / y and no more than a number.
template <class A, class B, class D = detail::CommonDual<A, B>>
[[nodiscard]] D fmod(const A& a, const B& b) {
  using std::fmod, std::round;
  using Real = typename D::Value;
  const D &x = a, &y = b;
  const Real rest = fmod(x.value(), y.value());
  const Real whole = round((x.value() - rest) / y.value());
  return detail::chain<Real>(x, y, rest, Real(1), -whole);
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> floor(const Dual<Real, N>& x) {
  using std::floor;
  return Real(floor(x.value()));
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> ceil(const Dual<Real, N>& x) {
  using std::ceil;
  return Real(ceil(x.value()));
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> round(const Dual<Real, N>& x) {
  using std::round;
  return Real(round(x.value()));
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> trunc(const Dual<Real, N>& x) {
  using std::trunc;
  return Real(trunc(x.value()));
}

}  // namespace whet

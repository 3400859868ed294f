#pragma once
/// The smooth functions of <cmath> for dual numbers, found by argument-dependent look-up.

#include <cmath>
#include <cstddef>
#include <type_traits>

#include <whet/derivatives/dual.hpp>
#include <whet/derivatives/dual_chain.hpp>

namespace whet {

// Each function spells out its value by the same call that a plain number makes, so that the value
// part of a dual number is bit for bit what the plain call gives.

template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> exp(const Dual<Real, N>& x) {
  using std::exp;
  const Real value = exp(x.value());
  return detail::chain(x, value, value);
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> exp2(const Dual<Real, N>& x) {
  using std::exp2, std::log;
  const Real value = exp2(x.value());
  return detail::chain<Real>(x, value, value * log(Real(2)));
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> expm1(const Dual<Real, N>& x) {
  using std::exp, std::expm1;
  return detail::chain<Real>(x, expm1(x.value()), exp(x.value()));
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> log(const Dual<Real, N>& x) {
  using std::log;
  return detail::chain<Real>(x, log(x.value()), 1 / x.value());
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> log2(const Dual<Real, N>& x) {
  using std::log, std::log2;
  return detail::chain<Real>(x, log2(x.value()), 1 / (x.value() * log(Real(2))));
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> log10(const Dual<Real, N>& x) {
  using std::log, std::log10;
  return detail::chain<Real>(x, log10(x.value()), 1 / (x.value() * log(Real(10))));
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> log1p(const Dual<Real, N>& x) {
  using std::log1p;
  return detail::chain<Real>(x, log1p(x.value()), 1 / (1 + x.value()));
}

template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> sqrt(const Dual<Real, N>& x) {
  using std::sqrt;
  const Real root = sqrt(x.value());
  return detail::chain<Real>(x, root, 1 / (2 * root));
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> cbrt(const Dual<Real, N>& x) {
  using std::cbrt;
  const Real root = cbrt(x.value());
  return detail::chain<Real>(x, root, 1 / (3 * root * root));
}

/// x^p for a constant p.
template <class Real, std::size_t N, detail::ConstantFor<Dual<Real, N>> P>
[[nodiscard]] Dual<Real, N> pow(const Dual<Real, N>& x, const P& p) {
  using std::pow;
  using Exponent = std::conditional_t<std::is_integral_v<P>, P, Real>;  // not narrower than x
  const Exponent power(p);
  // The exponent 0 apart: 0 * x^-1 is no number at x = 0.
  const Real slope =
      detail::vanishes(p) ? Real(0) : Real(Real(p) * pow(x.value(), power - Exponent(1)));
  return detail::chain<Real>(x, pow(x.value(), power), slope);
}
/// b^y for a constant b.
template <class Real, std::size_t N, detail::ConstantFor<Dual<Real, N>> B>
[[nodiscard]] Dual<Real, N> pow(const B& b, const Dual<Real, N>& y) {
  using std::log, std::pow;
  const Real value = pow(Real(b), y.value());
  // 0^y is flat in y > 0, where log(0) is not finite.
  const Real slope = detail::vanishes(value) ? Real(0) : Real(value * log(Real(b)));
  return detail::chain<Real>(y, value, slope);
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> pow(const Dual<Real, N>& x, const Dual<Real, N>& y) {
  const Dual<Real, N> in_x = pow(x, y.value()), in_y = pow(x.value(), y);
  return {in_x.value(), (in_x + in_y).gradient()};
}

template <class A, class B, class D = detail::CommonDual<A, B>>
[[nodiscard]] D hypot(const A& a, const B& b) {
  using std::hypot;
  using Real = typename D::Value;
  const D &x = a, &y = b;
  const Real length = hypot(x.value(), y.value());
  return detail::chain<Real>(x, y, length, x.value() / length, y.value() / length);
}
template <class A, class B, class C, class D = detail::CommonDual<A, B, C>>
[[nodiscard]] D hypot(const A& a, const B& b, const C& c) {
  using std::hypot;
  using Real = typename D::Value;
  const D &x = a, &y = b, &z = c;
  Real length;
  if constexpr (requires { hypot(x.value(), y.value(), z.value()); }) {
    length = hypot(x.value(), y.value(), z.value());
  } else {  // wide types have that of two alone
    length = hypot(hypot(x.value(), y.value()), z.value());
  }
  const D in_xy = detail::chain<Real>(x, y, length, x.value() / length, y.value() / length);
  const D in_z = detail::chain<Real>(z, length, z.value() / length);
  return {length, (in_xy + in_z).gradient()};
}

template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> sin(const Dual<Real, N>& x) {
  using std::cos, std::sin;
  return detail::chain<Real>(x, sin(x.value()), cos(x.value()));
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> cos(const Dual<Real, N>& x) {
  using std::cos, std::sin;
  return detail::chain<Real>(x, cos(x.value()), -sin(x.value()));
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> tan(const Dual<Real, N>& x) {
  using std::tan;
  const Real value = tan(x.value());
  return detail::chain<Real>(x, value, 1 + value * value);
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> asin(const Dual<Real, N>& x) {
  using std::asin, std::sqrt;
  return detail::chain<Real>(x, asin(x.value()), 1 / sqrt((1 - x.value()) * (1 + x.value())));
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> acos(const Dual<Real, N>& x) {
  using std::acos, std::sqrt;
  return detail::chain<Real>(x, acos(x.value()), -1 / sqrt((1 - x.value()) * (1 + x.value())));
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> atan(const Dual<Real, N>& x) {
  using std::atan;
  return detail::chain<Real>(x, atan(x.value()), 1 / (1 + x.value() * x.value()));
}
template <class A, class B, class D = detail::CommonDual<A, B>>
[[nodiscard]] D atan2(const A& a, const B& b) {
  using std::atan2, std::hypot;
  using Real = typename D::Value;
  const D &y = a, &x = b;
  const Real r = hypot(x.value(), y.value());
  return detail::chain<Real>(y, x, atan2(y.value(), x.value()), x.value() / r / r,
                             -y.value() / r / r);
}

template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> sinh(const Dual<Real, N>& x) {
  using std::cosh, std::sinh;
  return detail::chain<Real>(x, sinh(x.value()), cosh(x.value()));
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> cosh(const Dual<Real, N>& x) {
  using std::cosh, std::sinh;
  return detail::chain<Real>(x, cosh(x.value()), sinh(x.value()));
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> tanh(const Dual<Real, N>& x) {
  using std::cosh, std::tanh;
  const Real reciprocal = 1 / cosh(x.value());  // 1 - tanh^2 loses its digits in the tails
  return detail::chain<Real>(x, tanh(x.value()), reciprocal * reciprocal);
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> asinh(const Dual<Real, N>& x) {
  using std::asinh, std::hypot;
  return detail::chain<Real>(x, asinh(x.value()), 1 / hypot(Real(1), x.value()));
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> acosh(const Dual<Real, N>& x) {
  using std::acosh, std::sqrt;
  return detail::chain<Real>(x, acosh(x.value()), 1 / (sqrt(x.value() - 1) * sqrt(x.value() + 1)));
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> atanh(const Dual<Real, N>& x) {
  using std::atanh;
  return detail::chain<Real>(x, atanh(x.value()), 1 / ((1 - x.value()) * (1 + x.value())));
}

template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> erf(const Dual<Real, N>& x) {
  using std::erf, std::exp, std::sqrt;
  const Real slope = 2 / sqrt(detail::pi<Real>()) * exp(-x.value() * x.value());
  return detail::chain<Real>(x, erf(x.value()), slope);
}
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> erfc(const Dual<Real, N>& x) {
  using std::erfc, std::exp, std::sqrt;
  const Real slope = -2 / sqrt(detail::pi<Real>()) * exp(-x.value() * x.value());
  return detail::chain<Real>(x, erfc(x.value()), slope);
}

template <class A, class B, class C, class D = detail::CommonDual<A, B, C>>
[[nodiscard]] D fma(const A& a, const B& b, const C& c) {
  using std::fma;
  using Real = typename D::Value;
  const D &x = a, &y = b, &z = c;
  return {Real(fma(x.value(), y.value(), z.value())), (x * y + z).gradient()};
}

}  // namespace whet

#pragma once
/// The chain rule for dual numbers, and what every function of them needs.

#include <array>
#include <cmath>
#include <concepts>
#include <cstddef>
#include <numbers>
#include <type_traits>

#include <whet/derivatives/dual.hpp>

namespace whet {

// Of the value alone, as comparisons are.

template <class Real, std::size_t N>
[[nodiscard]] bool isfinite(const Dual<Real, N>& x) {
  using std::isfinite;
  return isfinite(x.value());
}
template <class Real, std::size_t N>
[[nodiscard]] bool isnan(const Dual<Real, N>& x) {
  using std::isnan;
  return isnan(x.value());
}
template <class Real, std::size_t N>
[[nodiscard]] bool isinf(const Dual<Real, N>& x) {
  using std::isinf;
  return isinf(x.value());
}
template <class Real, std::size_t N>
[[nodiscard]] bool signbit(const Dual<Real, N>& x) {
  using std::signbit;
  return signbit(x.value());
}

namespace detail {

/// Zero with all its derivatives; for a plain number: zero.
template <class T>
[[nodiscard]] bool vanishes(const T& x) {
  if constexpr (is_dual<T>) {
    for (const auto& g : x.gradient()) {
      if (!vanishes(g)) return false;
    }
    return vanishes(x.value());
  } else {
    return x == T(0);
  }
}

/// Chain rule: the dual of g(x) from the value g and the slope g'(x). What does not move x does not
/// move g, even where the slope is infinite: sqrt(t * x) at t = 0 is a plain zero for every x.
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> chain(const Dual<Real, N>& x, const Real& value, const Real& slope) {
  using std::isfinite;
  std::array<Real, N> gradient = x.gradient();
  if (isfinite(slope)) {
    for (Real& g : gradient) g *= slope;
  } else {
    for (Real& g : gradient) {
      if (!vanishes(g)) g *= slope;
    }
  }
  return Dual<Real, N>(value, gradient);
}

/// The same of g(x, y), by its two partial derivatives.
template <class Real, std::size_t N>
[[nodiscard]] Dual<Real, N> chain(const Dual<Real, N>& x, const Dual<Real, N>& y, const Real& value,
                                  const Real& slope_x, const Real& slope_y) {
  return {value, (chain(x, value, slope_x) + chain(y, value, slope_y)).gradient()};
}

/// The dual number among the types of several arguments, the others being constants beside it.
template <class A, class B>
struct Wider {};
template <class A, class B>
requires(std::same_as<A, B> || is_constant_for<B, A>) struct Wider<A, B> {
  using type = A;
};
template <class A, class B>
requires(!std::same_as<A, B> && !is_constant_for<B, A> &&
         is_constant_for<A, B>) struct Wider<A, B> {
  using type = B;
};
template <class T>
requires is_dual<T>
using DualOnly = T;
template <class A, class B, class C = A>
using CommonDual = DualOnly<typename Wider<typename Wider<A, B>::type, C>::type>;

template <class T>
[[nodiscard]] T pi() {
  using std::acos;
  if constexpr (std::is_floating_point_v<T>) {
    return std::numbers::pi_v<T>;
  } else {
    return acos(T(-1));
  }
}

}  // namespace detail

}  // namespace whet

#pragma once
/// Exact derivatives are asked for.

#include <string>
#include <type_traits>
#include <utility>
#include <vector>

#include <whet/observables/observable.hpp>
#include <whet/parameters/point.hpp>

namespace whet {

/// A function of a point that may be called with dual numbers in place of double; made by `exact`.
/// Called with Point<double> it is the function itself.
template <class F>
class Exact {
 public:
  explicit Exact(F f) : f_(std::move(f)) {}

  template <class Scalar>
  requires std::is_invocable_v < const F&, const Point<Scalar>
  & > decltype(auto) operator()(const Point<Scalar>& at) const { return f_(at); }

  [[nodiscard]] std::vector<std::string> labels() const { return detail::labels_of(f_); }

 private:
  F f_;
};

/// Say that f, written generic in its scalar as `[](const auto& at)`, may be called with dual
/// numbers: its derivatives are then exact to rounding, in one call for every eight parameters.
///
/// Two things a dual number cannot see. At a kink (abs, max, a table look-up) it takes one branch
/// in silence; `confirmed` spends a pair of calls a parameter to find that out. And where f cancels
/// large numbers against each other, its value and its derivatives lose those digits, beyond any
/// stated error.
template <class F>
[[nodiscard]] Exact<std::decay_t<F>> exact(F&& f) {
  return Exact<std::decay_t<F>>(std::forward<F>(f));
}

namespace detail {

/// Is F to be differentiated by dual numbers? Asked for, never tried: a lambda's body cannot be
/// probed.
template <class F>
inline constexpr bool has_exact_derivatives = false;
template <class F>
inline constexpr bool has_exact_derivatives<Exact<F>> = true;

}  // namespace detail
}  // namespace whet

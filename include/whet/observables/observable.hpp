#pragma once
/// What counts as an observable: a call with a point that returns a data vector.

#include <concepts>
#include <string>
#include <type_traits>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/parameters/point.hpp>

namespace whet {

namespace detail {

template <class V, class Scalar>
inline constexpr bool is_std_vector = false;
template <class Allocator, class Scalar>
inline constexpr bool is_std_vector<std::vector<Scalar, Allocator>, Scalar> = true;

template <class Derived>
requires(Derived::ColsAtCompileTime == 1) typename Derived::Scalar
    scalar_of_column(const Eigen::PlainObjectBase<Derived>&);

/// Returned by value and owning its numbers: std::vector<Scalar>, or a column vector that Eigen
/// stores (an expression refers to operands that die with the call).
template <class V, class Scalar>
concept OwningVector = is_std_vector<std::remove_cv_t<V>, Scalar> ||
    (!std::is_reference_v<V> && requires(const V& v) {
      { detail::scalar_of_column(v) } -> std::same_as<Scalar>;
    });

template <class F>
inline constexpr bool takes_a_point = std::is_invocable_v<const F&, const Point<double>&>;

template <class F>
inline constexpr bool returns_owning_vector = false;
template <class F>
requires takes_a_point<F>
inline constexpr bool returns_owning_vector<F> =
    OwningVector<std::invoke_result_t<const F&, const Point<double>&>, double>;

}  // namespace detail

/// A model's prediction of the data: called, const, with a Point<double>, it returns the data
/// vector by value, as std::vector<double> or a column that Eigen stores (Eigen::VectorXd). A
/// lambda that ends in an Eigen expression is none; write `-> Eigen::VectorXd`.
/// A class may have a member `labels()`, a std::vector<std::string> with a name for each element.
template <class F>
concept Observable = detail::returns_owning_vector<F>;

namespace detail {

/// True for an observable; otherwise a compile error whose first line says what is wrong. Use:
/// `if constexpr (detail::require_observable<F>()) { ... }`, so that nothing else is reported.
template <class F>
[[nodiscard]] constexpr bool require_observable() {
  static_assert(takes_a_point<F>,
                "whet: an Observable must be callable, const, with const whet::Point<double>&");
  if constexpr (takes_a_point<F>) {
    static_assert(returns_owning_vector<F>,
                  "whet: an Observable must return an owning vector; write -> Eigen::VectorXd");
  }
  return Observable<F>;
}

/// Any data vector as an Eigen column.
template <class Scalar>
using Column = Eigen::Matrix<Scalar, Eigen::Dynamic, 1>;
template <class Scalar, class Allocator>
[[nodiscard]] Column<Scalar> to_vector(const std::vector<Scalar, Allocator>& data) {
  return Eigen::Map<const Column<Scalar>>(data.data(), static_cast<Eigen::Index>(data.size()));
}
template <class Derived>
[[nodiscard]] Column<typename Derived::Scalar> to_vector(
    const Eigen::PlainObjectBase<Derived>& data) {
  return data.derived().matrix();
}
template <class Scalar>
[[nodiscard]] Column<Scalar> to_vector(Column<Scalar>&& data) {
  return std::move(data);
}

/// The names of an observable's elements; empty: it gives none.
template <class F>
[[nodiscard]] std::vector<std::string> labels_of(const F& observable) {
  if constexpr (requires {
                  { observable.labels() } -> std::convertible_to<std::vector<std::string>>;
                }) {
    return observable.labels();
  } else {
    return {};
  }
}

}  // namespace detail
}  // namespace whet

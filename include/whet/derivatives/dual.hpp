#pragma once
/// Dual numbers: a value and its derivatives in a few directions, carried through any arithmetic.

#include <array>
#include <compare>
#include <concepts>
#include <cstddef>
#include <iosfwd>
#include <limits>
#include <type_traits>
#include <utility>

#include <Eigen/Core>

namespace whet {

template <class Real, std::size_t N>
class Dual;

namespace detail {

template <class T>
inline constexpr bool is_dual = false;
template <class Real, std::size_t N>
inline constexpr bool is_dual<Dual<Real, N>> = true;

/// Does a C stand for a constant beside a T? Numbers of the language do, and beside a dual number
/// its own real type and whatever is a constant beside that.
template <class C, class T>
inline constexpr bool is_constant_for = std::is_arithmetic_v<C>;
template <class C, class Real, std::size_t N>
inline constexpr bool is_constant_for<C, Dual<Real, N>> =
    std::same_as<C, Real> || is_constant_for<C, Real>;

template <class C, class D>
concept ConstantFor = is_constant_for<C, D>;
template <class B, class D>
concept OperandFor = std::same_as<B, D> || ConstantFor<B, D>;

}  // namespace detail

/// A value and its gradient in N directions (forward-mode differentiation: Wengert 1964). It
/// computes with its like, with Real, int and double; comparisons are by value, so a branch is
/// taken as the plain number would take it. <cmath> is in dual_functions.hpp and dual_branches.hpp,
/// the gamma function in dual_gamma.hpp; write `using std::exp;` and then `exp(x)`.
/// @tparam Real  double, a wide floating-point type without expression templates, or itself a Dual
///   (for second derivatives)
template <class Real, std::size_t N>
class Dual {
 public:
  using Value = Real;

  /// Zero.
  Dual() = default;

  /// A constant: its gradient is zero.
  template <detail::ConstantFor<Dual> C>
  Dual(const C& constant)  // NOLINT(google-explicit-constructor): constants mix with variables
      : value_(static_cast<Real>(constant)) {}

  Dual(Real value, std::array<Real, N> gradient)
      : value_(std::move(value)), gradient_(std::move(gradient)) {}

  /// The number whose gradient has the elements component(0), ... component(N - 1).
  template <std::invocable<std::size_t> F>
  Dual(Real value, const F& component) : value_(std::move(value)) {
    for (std::size_t i = 0; i < N; ++i) gradient_[i] = component(i);
  }

  /// The variable of one direction, 0 <= direction < N: its gradient is one there.
  [[nodiscard]] static Dual variable(Real value, std::size_t direction) {
    Dual x(std::move(value), std::array<Real, N>{});
    x.gradient_[direction] = Real(1);
    return x;
  }

  [[nodiscard]] const Real& value() const noexcept { return value_; }
  [[nodiscard]] const std::array<Real, N>& gradient() const noexcept { return gradient_; }

  friend Dual operator+(const Dual& a) { return a; }
  friend Dual operator-(const Dual& a) {
    return Dual(-a.value_, [&](std::size_t i) { return Real(-a.gradient_[i]); });
  }

  friend Dual operator+(const Dual& a, const Dual& b) {
    return Dual(a.value_ + b.value_,
                [&](std::size_t i) { return Real(a.gradient_[i] + b.gradient_[i]); });
  }
  friend Dual operator-(const Dual& a, const Dual& b) {
    return Dual(a.value_ - b.value_,
                [&](std::size_t i) { return Real(a.gradient_[i] - b.gradient_[i]); });
  }
  friend Dual operator*(const Dual& a, const Dual& b) {
    return Dual(a.value_ * b.value_, [&](std::size_t i) {
      return Real(a.gradient_[i] * b.value_ + a.value_ * b.gradient_[i]);
    });
  }
  friend Dual operator/(const Dual& a, const Dual& b) {
    const Real quotient = a.value_ / b.value_, inverse = Real(1) / b.value_;
    return Dual(quotient, [&](std::size_t i) {
      return Real((a.gradient_[i] - quotient * b.gradient_[i]) * inverse);
    });
  }

  template <detail::ConstantFor<Dual> C>
  friend Dual operator+(const Dual& a, const C& c) {
    return {a.value_ + static_cast<Real>(c), a.gradient_};
  }
  template <detail::ConstantFor<Dual> C>
  friend Dual operator-(const Dual& a, const C& c) {
    return {a.value_ - static_cast<Real>(c), a.gradient_};
  }
  template <detail::ConstantFor<Dual> C>
  friend Dual operator*(const Dual& a, const C& c) {
    const Real factor = static_cast<Real>(c);
    return Dual(a.value_ * factor, [&](std::size_t i) { return Real(a.gradient_[i] * factor); });
  }
  template <detail::ConstantFor<Dual> C>
  friend Dual operator/(const Dual& a, const C& c) {
    const Real divisor = static_cast<Real>(c);
    return Dual(a.value_ / divisor, [&](std::size_t i) { return Real(a.gradient_[i] / divisor); });
  }
  template <detail::ConstantFor<Dual> C>
  friend Dual operator+(const C& c, const Dual& a) {
    return a + c;
  }
  template <detail::ConstantFor<Dual> C>
  friend Dual operator-(const C& c, const Dual& a) {
    return Dual(static_cast<Real>(c) - a.value_,
                [&](std::size_t i) { return Real(-a.gradient_[i]); });
  }
  template <detail::ConstantFor<Dual> C>
  friend Dual operator*(const C& c, const Dual& a) {
    return a * c;
  }
  template <detail::ConstantFor<Dual> C>
  friend Dual operator/(const C& c, const Dual& a) {
    const Real quotient = static_cast<Real>(c) / a.value_, slope = -quotient / a.value_;
    return Dual(quotient, [&](std::size_t i) { return Real(slope * a.gradient_[i]); });
  }

  // A new number each time: were it written in place, the compiler could not tell it from b.
  template <detail::OperandFor<Dual> B>
  Dual& operator+=(const B& b) {
    return *this = *this + b;
  }
  template <detail::OperandFor<Dual> B>
  Dual& operator-=(const B& b) {
    return *this = *this - b;
  }
  template <detail::OperandFor<Dual> B>
  Dual& operator*=(const B& b) {
    return *this = *this * b;
  }
  template <detail::OperandFor<Dual> B>
  Dual& operator/=(const B& b) {
    return *this = *this / b;
  }

  friend bool operator==(const Dual& a, const Dual& b) { return a.value_ == b.value_; }
  friend std::partial_ordering operator<=>(const Dual& a, const Dual& b) {
    return ordering(a.value_, b.value_);
  }
  template <detail::ConstantFor<Dual> C>
  friend bool operator==(const Dual& a, const C& c) {
    return a.value_ == static_cast<Real>(c);
  }
  template <detail::ConstantFor<Dual> C>
  friend std::partial_ordering operator<=>(const Dual& a, const C& c) {
    return ordering(a.value_, static_cast<Real>(c));
  }

  /// Prints the value.
  template <class Character, class Traits>
  friend std::basic_ostream<Character, Traits>& operator<<(
      std::basic_ostream<Character, Traits>& out, const Dual& x) {
    return out << x.value_;
  }

 private:
  // Not a <=> b: wide floating-point types do not all have it.
  static std::partial_ordering ordering(const Real& a, const Real& b) {
    if (a < b) return std::partial_ordering::less;
    if (b < a) return std::partial_ordering::greater;
    if (a == b) return std::partial_ordering::equivalent;
    return std::partial_ordering::unordered;
  }

  Real value_{};
  std::array<Real, N> gradient_{};
};

}  // namespace whet

/// The limits of a dual number are those of its value.
template <class Real, std::size_t N>
struct std::numeric_limits<whet::Dual<Real, N>> : std::numeric_limits<Real> {
 private:
  using Limits = std::numeric_limits<Real>;
  using Dual = whet::Dual<Real, N>;

 public:
  static Dual min() { return Limits::min(); }
  static Dual max() { return Limits::max(); }
  static Dual lowest() { return Limits::lowest(); }
  static Dual epsilon() { return Limits::epsilon(); }
  static Dual round_error() { return Limits::round_error(); }
  static Dual infinity() { return Limits::infinity(); }
  static Dual quiet_NaN() { return Limits::quiet_NaN(); }
  static Dual signaling_NaN() { return Limits::signaling_NaN(); }
  static Dual denorm_min() { return Limits::denorm_min(); }
};

/// Dual numbers are the elements of Eigen's vectors and matrices ...
template <class Real, std::size_t N>
struct Eigen::NumTraits<whet::Dual<Real, N>> : Eigen::GenericNumTraits<whet::Dual<Real, N>> {
  enum {
    IsComplex = 0,
    IsInteger = 0,
    IsSigned = 1,
    RequireInitialization = 1,
    ReadCost = (N + 1) * std::size_t{Eigen::NumTraits<Real>::ReadCost},
    AddCost = (N + 1) * std::size_t{Eigen::NumTraits<Real>::AddCost},
    MulCost = (2 * N + 1) * std::size_t{Eigen::NumTraits<Real>::MulCost}
  };
};

/// ... and mix there with constants.
template <class Real, std::size_t N, whet::detail::ConstantFor<whet::Dual<Real, N>> C, class Op>
struct Eigen::ScalarBinaryOpTraits<whet::Dual<Real, N>, C, Op> {
  using ReturnType = whet::Dual<Real, N>;
};
template <class Real, std::size_t N, whet::detail::ConstantFor<whet::Dual<Real, N>> C, class Op>
struct Eigen::ScalarBinaryOpTraits<C, whet::Dual<Real, N>, Op> {
  using ReturnType = whet::Dual<Real, N>;
};

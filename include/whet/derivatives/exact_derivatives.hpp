#pragma once
/// Exact derivatives of an observable that is generic in its scalar, by dual numbers.

#include <algorithm>
#include <cstddef>
#include <exception>
#include <span>
#include <string>
#include <type_traits>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/derivatives/derivatives.hpp>
#include <whet/derivatives/dual.hpp>
#include <whet/derivatives/dual_branches.hpp>
#include <whet/derivatives/dual_functions.hpp>
#include <whet/evaluation/evaluation.hpp>
#include <whet/observables/exact.hpp>
#include <whet/observables/observable.hpp>
#include <whet/parameters/parameters.hpp>
#include <whet/parameters/point.hpp>
#include <whet/support/error.hpp>
#include <whet/support/function_ref.hpp>
#include <whet/support/text.hpp>

namespace whet::detail {

/// Directions a pass: of 4, 8 and 16 the fastest for 5 to 50 parameters (1.1 to 1.8 plain calls a
/// parameter, 1000 elements of sums, quotients, exp and pow, GCC 12 -O2).
inline constexpr std::size_t directions = 8;
template <class Real>
using ExactScalar = Dual<Real, directions>;

/// The data vector and its derivatives by all parameters, in any floating-point type.
template <class Real>
struct ExactJacobian {
  Eigen::Matrix<Real, Eigen::Dynamic, 1> mean{};                 ///< n
  Eigen::Matrix<Real, Eigen::Dynamic, Eigen::Dynamic> values{};  ///< n x P
  int passes{0};                                                 ///< calls of the observable
};

/// An observable called with dual numbers, its type put away.
template <class Real>
using ExactRef = FunctionRef<Column<ExactScalar<Real>>(const Point<ExactScalar<Real>>&)>;

/// Call f once for each eight parameters (once where there are none); the data vector comes from
/// the same calls.
template <class Real>
[[nodiscard]] ExactJacobian<Real> exact_passes(const Parameters& parameters, ExactRef<Real> f,
                                               std::span<const std::string> labels) {
  using std::isfinite;
  using Scalar = ExactScalar<Real>;
  const auto refuse = [](std::string what, std::string got, std::string expected,
                         std::string advice = {}) {
    fail<ObservableError>({.where = "exact derivatives",
                           .what = std::move(what),
                           .got = std::move(got),
                           .expected = std::move(expected),
                           .advice = std::move(advice)});
  };
  const auto width = static_cast<Eigen::Index>(directions);
  ExactJacobian<Real> jacobian;
  Eigen::Index first = 0;
  do {
    const Eigen::Index count = std::min(width, parameters.size() - first);
    std::vector<Scalar> values;
    for (const Parameter& p : parameters) values.emplace_back(p.fiducial);
    std::vector<std::string> names;
    for (Eigen::Index j = 0; j < count; ++j) {
      const Parameter& p = parameters[first + j];
      values[static_cast<std::size_t>(first + j)] =
          Scalar::variable(Real(p.fiducial), static_cast<std::size_t>(j));
      names.push_back(p.name);
    }
    const std::string failed =
        "the observable failed at the fiducial point, differentiated by " + listed(names);
    Column<Scalar> data;
    try {
      data = f(Point<Scalar>(parameters, std::move(values)));
    } catch (const std::exception& error) {
      refuse(failed, error.what(), "");
    } catch (...) {
      refuse(failed, "an exception that is no std::exception", "");
    }
    if (first == 0) {
      jacobian.mean.resize(data.size());
      jacobian.values.resize(data.size(), parameters.size());
    } else if (data.size() != jacobian.mean.size()) {
      refuse("length of the data vector, differentiated by " + listed(names), text(data.size()),
             text(jacobian.mean.size()) + ", as in the call before");
    }
    for (Eigen::Index i = 0; i < data.size(); ++i) {
      if (!isfinite(data(i))) {
        refuse(element_name(i, labels) + " at the fiducial point",
               text(static_cast<double>(data(i).value())), "a finite value");
      }
      jacobian.mean(i) = data(i).value();
      for (Eigen::Index j = 0; j < count; ++j) {
        const Real& derivative = data(i).gradient()[static_cast<std::size_t>(j)];
        if (!isfinite(derivative)) {
          refuse("parameter " + in_quotes(parameters[first + j].name) + ", derivative of " +
                     element_name(i, labels),
                 text(static_cast<double>(derivative)), "a finite value",
                 "Is the observable differentiable there (a root or logarithm of 0)?");
        }
        jacobian.values(i, first + j) = derivative;
      }
    }
    ++jacobian.passes;
    first += count;
  } while (first < parameters.size());
  return jacobian;
}

template <class F, class Scalar>
inline constexpr bool is_generic_observable = false;
template <class F, class Scalar>
requires std::is_invocable_v < const F&, const Point<Scalar>
& > inline constexpr bool is_generic_observable<F, Scalar> =
    OwningVector<std::invoke_result_t<const F&, const Point<Scalar>&>, Scalar>;

/// Derivatives by dual numbers over Real.
/// @throws ObservableError naming parameter and element: a value or derivative that is not finite,
///   an exception, a data vector that changes its length
template <class Real, class F>
[[nodiscard]] ExactJacobian<Real> exact_jacobian(const Parameters& parameters, const F& f) {
  using Scalar = ExactScalar<Real>;
  static_assert(is_generic_observable<F, Scalar>,
                "whet: exact(f) needs f generic in its scalar: write [](const auto& at), and "
                "return std::vector or an Eigen column of that scalar");
  if constexpr (is_generic_observable<F, Scalar>) {
    const auto call = [&f](const Point<Scalar>& at) { return to_vector(f(at)); };
    return exact_passes<Real>(parameters, call, labels_of(f));
  }
}

/// The exact derivatives of f at the fiducial point, with no error beyond rounding; see `exact`.
/// @throws ObservableError as exact_jacobian does
template <class F>
[[nodiscard]] Derivatives exact_derivatives(const Parameters& parameters, const F& f) {
  ExactJacobian<double> jacobian = exact_jacobian<double>(parameters, f);
  return Derivatives(Derivatives::Parts{
      .parameters = parameters,
      .mean = std::move(jacobian.mean),
      .values = std::move(jacobian.values),
      .labels = labels_of(f),
      .reports = std::vector<DerivativeReport>(static_cast<std::size_t>(parameters.size()),
                                               {.status = DerivativeStatus::exact}),
      .evaluations = jacobian.passes,
      .rounds = 1});
}

}  // namespace whet::detail

#include <whet/observables/exact.hpp>

#include <type_traits>
#include <vector>

#include <doctest/doctest.h>

#include <whet/derivatives/dual.hpp>

using whet::exact;
using whet::Observable;
using whet::Parameters;
using whet::Point;
using whet::detail::has_exact_derivatives;

namespace {

const Parameters parameters{{"flux", 6.0}, {"width", 1.5}};
const auto both = [](const auto& at) { return std::vector{at["flux"], at["width"]}; };
const auto peak = [](const auto& at) { return at["flux"] / at["width"]; };

template <class F>
struct Holder {  // as a likelihood has it: the argument is deduced
  explicit Holder(F f) : f_(std::move(f)) {}
  F f_;
};

}  // namespace

TEST_CASE("A function marked exact is the function itself when called in double") {
  CHECK(exact(both)(Point<double>(parameters)) == std::vector<double>{6.0, 1.5});
  CHECK(exact(peak)(Point<double>(parameters)) == 4.0);
}

TEST_CASE("It may be called with dual numbers") {
  using Dual = whet::Dual<double, 2>;
  const Point<Dual> at(parameters, {Dual::variable(6.0, 0), Dual::variable(1.5, 1)});
  CHECK(exact(peak)(at).gradient() == std::array{1.0 / 1.5, -6.0 / 2.25});
}

TEST_CASE("Marking a function keeps it an observable, or none") {
  static_assert(Observable<decltype(exact(both))>);
  static_assert(!Observable<decltype(exact(peak))>);
  const auto expression = [](const auto& at) { return at["flux"] * Eigen::VectorXd::Ones(3); };
  static_assert(!Observable<decltype(exact(expression))>);
  CHECK(Observable<decltype(exact(both))>);
}

TEST_CASE("Exact derivatives are asked for, never assumed") {
  static_assert(!has_exact_derivatives<std::decay_t<decltype(both)>>);
  static_assert(has_exact_derivatives<decltype(exact(both))>);
  static_assert(has_exact_derivatives<decltype(exact(peak))>);
  CHECK(has_exact_derivatives<decltype(exact(both))>);
}

TEST_CASE("A class template deduces an exact function as any other") {
  const Holder holder(exact(both));
  static_assert(has_exact_derivatives<decltype(holder.f_)>);
  CHECK(holder.f_(Point<double>(parameters)).size() == 2);
}

#include <whet/observables/concatenate.hpp>

#include <string>
#include <type_traits>
#include <vector>

#include <doctest/doctest.h>

#include <whet/derivatives/dual.hpp>
#include <whet/observables/labelled.hpp>

using whet::concatenate;
using whet::exact;
using whet::labelled;
using whet::Observable;
using whet::Parameters;
using whet::Point;
using whet::detail::has_exact_derivatives;
using whet::detail::labels_of;

namespace {

const Parameters parameters{{"a", 1.0}, {"b", 2.0}};
const auto listed = [](const auto& at) { return std::vector{at["a"], at["b"]}; };
const auto column = [](const auto& at) {
  using Scalar = std::decay_t<decltype(at["a"])>;
  return Eigen::Matrix<Scalar, 2, 1>(at["a"] * at["b"], at["a"] + at["b"]);
};
const auto plain = [](const Point<double>& at) -> Eigen::VectorXd {
  return Eigen::VectorXd::Constant(1, at["a"] + 10.0);
};

}  // namespace

TEST_CASE("Data vectors of either kind follow one another in the order of the parts") {
  const auto whole = concatenate(listed, column, plain);
  CHECK(whole(Point<double>(parameters)) == std::vector<double>{1.0, 2.0, 2.0, 3.0, 11.0});
  CHECK(concatenate(plain)(Point<double>(parameters)) == std::vector<double>{11.0});
  static_assert(Observable<decltype(whole)>);
}

TEST_CASE("A concatenation nests") {
  const auto whole = concatenate(concatenate(plain, listed), plain);
  CHECK(whole(Point<double>(parameters)) == std::vector<double>{11.0, 1.0, 2.0, 11.0});
}

TEST_CASE("Generic parts serve dual numbers together") {
  using Dual = whet::Dual<double, 2>;
  const Point<Dual> at(parameters, {Dual::variable(1.0, 0), Dual::variable(2.0, 1)});
  const auto data = exact(concatenate(listed, column))(at);
  static_assert(std::is_same_v<decltype(data), const std::vector<Dual>>);
  CHECK(data[2].gradient() == std::array{2.0, 1.0});
}

TEST_CASE("The whole is exact where it is marked so, or all its parts are") {
  static_assert(has_exact_derivatives<decltype(exact(concatenate(listed, column)))>);
  static_assert(has_exact_derivatives<decltype(concatenate(exact(listed), exact(column)))>);
  static_assert(!has_exact_derivatives<decltype(concatenate(listed, column))>);
  static_assert(!has_exact_derivatives<decltype(concatenate(exact(listed), plain))>);
  // Not callable with dual numbers, and asking does not break the build.
  using Dual = whet::Dual<double, 2>;
  static_assert(!std::is_invocable_v<decltype(concatenate(listed, plain)), const Point<Dual>&>);
  CHECK(!has_exact_derivatives<decltype(concatenate(exact(listed), plain))>);
}

TEST_CASE("Labels are kept where every part has them") {
  const auto first = labelled(listed, {"x", "y"});
  const auto second = exact(labelled(column, {"product", "sum"}));
  CHECK(labels_of(concatenate(first, second)) ==
        std::vector<std::string>{"x", "y", "product", "sum"});
  CHECK(labels_of(exact(concatenate(first, second))).size() == 4);
  CHECK(labels_of(concatenate(first, plain)).empty());
}

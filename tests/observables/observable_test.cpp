#include <whet/observables/observable.hpp>

#include <string>
#include <vector>

#include <doctest/doctest.h>

using whet::Observable;
using whet::Point;
using whet::detail::labels_of;
using whet::detail::to_vector;

namespace {

using At = const Point<double>&;

template <class Result>
using Returning = Result (*)(At);

struct Code {  // as an old code has it: a class with a const call operator and labels
  Eigen::Vector2d operator()(At at) const { return {at["a"], 2.0 * at["a"]}; }
  [[nodiscard]] std::vector<std::string> labels() const { return {"first", "second"}; }
};
struct Mutable {
  std::vector<double> operator()(At) { return {}; }
};
struct Cached {
  const std::vector<double>& operator()(At) const { return data; }
  std::vector<double> data{};
};

}  // namespace

TEST_CASE("Owning vectors of double make an observable") {
  static_assert(Observable<Returning<std::vector<double>>>);
  static_assert(Observable<Returning<Eigen::VectorXd>>);
  static_assert(Observable<Returning<Eigen::Vector3d>>);
  static_assert(Observable<Returning<Eigen::ArrayXd>>);
  static_assert(Observable<Code>);
  const auto generic = [](const auto& at) { return std::vector{at["a"]}; };
  static_assert(Observable<decltype(generic)>);
  const auto explicit_type = [](At at) -> Eigen::VectorXd {
    return at["a"] * Eigen::VectorXd::Ones(3);
  };
  static_assert(Observable<decltype(explicit_type)>);
  CHECK(Observable<Code>);
}

TEST_CASE("An expression, a reference, a view and another scalar make none") {
  const auto expression = [](At at) { return at["a"] * Eigen::VectorXd::Ones(3); };
  static_assert(!Observable<decltype(expression)>);
  const auto generic_expression = [](const auto& at) { return at["a"] * Eigen::VectorXd::Ones(3); };
  static_assert(!Observable<decltype(generic_expression)>);
  static_assert(!Observable<Cached>);
  static_assert(!Observable<Returning<Eigen::Map<Eigen::VectorXd>>>);
  static_assert(!Observable<Returning<Eigen::Ref<const Eigen::VectorXd>>>);
  static_assert(!Observable<Returning<Eigen::VectorXf>>);
  static_assert(!Observable<Returning<std::vector<float>>>);
  static_assert(!Observable<Returning<std::vector<int>>>);
  static_assert(!Observable<Returning<Eigen::MatrixXd>>);
  static_assert(!Observable<Returning<Eigen::RowVectorXd>>);
  static_assert(!Observable<Returning<double>>);
  static_assert(!Observable<Returning<void>>);
  CHECK(!Observable<decltype(expression)>);
}

TEST_CASE("A call that is not const, or not with a point, makes none") {
  static_assert(!Observable<Mutable>);
  static_assert(!Observable<int>);
  static_assert(!Observable<std::vector<double> (*)(double)>);
  CHECK(!Observable<Mutable>);
}

TEST_CASE("Every data vector becomes the same Eigen column") {
  const Eigen::VectorXd expected = Eigen::Vector3d(1.0, 2.0, 3.0);
  CHECK(to_vector(std::vector<double>{1.0, 2.0, 3.0}) == expected);
  CHECK(to_vector(Eigen::Vector3d(1.0, 2.0, 3.0)) == expected);
  CHECK(to_vector(Eigen::ArrayXd(expected.array())) == expected);
  CHECK(to_vector(expected) == expected);
  CHECK(to_vector(std::vector<double>{}).size() == 0);
  Eigen::VectorXd moved = expected;
  const double* const numbers = moved.data();
  CHECK(to_vector(std::move(moved)).data() == numbers);
}

TEST_CASE("A class names its elements by a member, and one without gives none") {
  CHECK(labels_of(Code{}) == std::vector<std::string>{"first", "second"});
  CHECK(labels_of(Mutable{}).empty());
}

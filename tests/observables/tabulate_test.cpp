#include <whet/observables/tabulate.hpp>

#include <array>
#include <list>
#include <type_traits>
#include <vector>

#include <doctest/doctest.h>
#include <Eigen/Core>

#include <whet/derivatives/dual.hpp>

using whet::tabulate;

namespace {

/// 2, 1: a range that cannot be gone through where it is const, and has no size.
struct Countdown {
  struct Iterator {
    int left;
    int operator*() const { return left; }
    Iterator& operator++() {
      --left;
      return *this;
    }
    bool operator!=(const Iterator& other) const { return left != other.left; }
  };
  Iterator begin() { return {2}; }
  Iterator end() { return {0}; }
};

}  // namespace

TEST_CASE("A function is called at each abscissa, in order") {
  const std::vector<double> xs{3.0, 1.0, 2.0};
  std::vector<double> seen;
  const auto square = [&seen](double x) {
    seen.push_back(x);
    return x * x;
  };
  CHECK(tabulate(xs, square) == std::vector<double>{9.0, 1.0, 4.0});
  CHECK(seen == xs);
  CHECK(tabulate(std::vector<double>{}, square).empty());
}

TEST_CASE("Any range will do") {
  const auto half = [](auto x) { return 0.5 * x; };
  const std::vector<double> expected{0.5, 1.0};
  const double plain[] = {1.0, 2.0};
  CHECK(tabulate(plain, half) == expected);
  CHECK(tabulate(std::array{1.0, 2.0}, half) == expected);
  CHECK(tabulate(std::list<int>{1, 2}, half) == expected);
  CHECK(tabulate(Eigen::Vector2d(1.0, 2.0), half) == expected);
  CHECK(tabulate(Countdown{}, half) == std::vector<double>{1.0, 0.5});
}

TEST_CASE("References to elements are returned by value") {
  const std::vector<double> xs{1.0, 2.0};
  const auto itself = [](const double& x) -> const double& { return x; };
  static_assert(std::is_same_v<decltype(tabulate(xs, itself)), std::vector<double>>);
  CHECK(tabulate(xs, itself) == xs);
}

TEST_CASE("Dual numbers come out as dual numbers") {
  using Dual = whet::Dual<double, 1>;
  const Dual slope = Dual::variable(3.0, 0);
  const auto line = tabulate(std::array{1.0, 4.0}, [&](double x) { return slope * x; });
  static_assert(std::is_same_v<decltype(line), const std::vector<Dual>>);
  CHECK(line[1].value() == 12.0);
  CHECK(line[1].gradient()[0] == 4.0);
}

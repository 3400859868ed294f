#include <whet/derivatives/kink.hpp>

#include <cmath>

#include <doctest/doctest.h>

#include <support/close_to.hpp>

using whet::detail::Kinks;
using whet::detail::NoiseFloor;
using whet::detail::Readings;
using whet::detail::Windows;
using whet::test::close_to;

namespace {

template <class F>
Kinks suspected(F f) {
  Readings all{.origin = Eigen::VectorXd::Constant(1, f(0.0))};
  for (const double t : {0.2, -0.2, 0.1, -0.1, 0.05, -0.05}) {
    all.add(t, Eigen::VectorXd::Constant(1, f(t)));
  }
  const NoiseFloor noise{.level = Eigen::VectorXd::Zero(1),
                         .confirmed = whet::detail::Mask::Constant(1, false),
                         .rounded = whet::detail::Mask::Constant(1, false)};
  return whet::detail::suspected_kinks(all, Windows(all.displacements), noise, false);
}

}  // namespace

TEST_CASE("A kink shows the jump of its slope beside any smooth part") {
  CHECK(suspected([](double t) { return 3 * std::abs(t) + std::exp(t); }).slope(0) ==
        close_to(6.0, 1e-2));
}

TEST_CASE("A jump shows as one of the value, to either side or both") {
  for (const auto f : {+[](double t) { return t >= 0 ? 1.0 + t : t; },
                       +[](double t) { return t > 0   ? t + 1
                                              : t < 0 ? t - 1
                                                      : 0.0; }}) {
    const Kinks kinks = suspected(f);
    CHECK(kinks.any());
    CHECK(kinks.of_value(0));
  }
}

TEST_CASE("A fiducial value that is off alone, as noise makes it, is no kink") {
  CHECK(!suspected([](double t) { return t == 0 ? 1.0 : std::sin(t); }).any());
}

TEST_CASE("Smooth functions are not suspected") {
  CHECK(!suspected([](double t) { return std::exp(2 * t); }).any());
  CHECK(!suspected([](double t) { return t * t; }).any());
  CHECK(!suspected([](double t) { return std::cos(7 * t + 1); }).any());
  CHECK(!suspected([](double t) { return std::log(1 + 3 * t); }).any());
}

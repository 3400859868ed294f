#include <whet/derivatives/estimate.hpp>

#include <cmath>

#include <doctest/doctest.h>

#include <support/close_to.hpp>

using whet::detail::Estimate;
using whet::detail::Readings;
using whet::detail::Windows;
using whet::test::close_to;

namespace {

/// The derivatives of functions of t at 0 from pairs at these steps.
template <class... F>
Estimate estimate_of(const std::vector<double>& steps, F... f) {
  Readings all{.origin = Eigen::VectorXd{{f(0.0)...}}};
  for (const double step : steps) {
    for (const double t : {step, -step}) all.add(t, Eigen::VectorXd{{f(t)...}});
  }
  const Windows windows(all.displacements);
  return whet::detail::estimate_elements(all, windows, whet::detail::noise_floor(all, windows, {}),
                                         1.0);
}

}  // namespace

TEST_CASE("The error of a smooth function is claimed, and not by more than it is worth") {
  const Estimate e = estimate_of({0.1, 0.05, 0.025, 0.0125}, [](double t) { return std::exp(t); });
  const double claim = std::abs(e.truncation(0)) + e.noise(0);
  CHECK(std::abs(e.value(0) - 1.0) <= claim);
  CHECK(claim < 1e-9);
}

TEST_CASE("Steps far beyond an oscillation do not look certain") {
  const Estimate e = estimate_of({0.1, 0.05, 0.025}, [](double t) { return std::sin(200 * t); });
  CHECK(std::abs(e.truncation(0)) + e.noise(0) > std::abs(e.value(0)));
}

TEST_CASE("A power of the step below that of a smooth function is honoured") {
  const auto f = [](double t) { return 2 * t + std::pow(std::abs(t), 1.5) * (t > 0 ? 1 : -0.2); };
  const Estimate e = estimate_of({0.1, 0.05, 0.025, 0.0125}, f);
  CHECK(std::abs(e.value(0) - 2.0) <= std::abs(e.truncation(0)) + e.noise(0));
}

TEST_CASE("The truncation error has the sign that neighbouring elements share") {
  const Estimate e = estimate_of(
      {0.4, 0.2, 0.1}, [](double t) { return std::exp(t) * 1.00; },
      [](double t) { return std::exp(t) * 1.01; }, [](double t) { return -std::exp(t); });
  CHECK(e.truncation(0) * e.truncation(1) > 0.0);
  CHECK(e.truncation(0) * e.truncation(2) < 0.0);
}

TEST_CASE("Elements do not know of each other's size") {
  const auto f = [](double t) { return std::sin(1 + t); };
  const auto tiny = [](double t) { return 0x1p-90 * std::sin(1 + t); };
  const Estimate e = estimate_of({0.1, 0.05, 0.025}, f, tiny);
  CHECK(e.value(1) == 0x1p-90 * e.value(0));
  CHECK(e.truncation(1) == close_to(0x1p-90 * e.truncation(0), 1e-12));
}

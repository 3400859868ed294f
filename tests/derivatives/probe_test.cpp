#include <whet/derivatives/probe.hpp>

#include <cmath>

#include <doctest/doctest.h>

#include <support/close_to.hpp>

using whet::detail::ColumnError;
using whet::detail::Line;
using whet::detail::Readings;
using whet::test::close_to;

namespace {

template <class F>
double step_for(const Line& line, F f) {
  const auto length = [](const Eigen::VectorXd& data) { return data.norm(); };
  const auto size = [](const ColumnError&) { return 0.0; };
  Readings all{.origin = Eigen::VectorXd::Constant(1, f(0.0))};
  for (const double t : whet::detail::probes(line)) {
    all.add(t, Eigen::VectorXd::Constant(1, f(t)));
  }
  return whet::detail::probed_step(all, {.length = length, .size = size});
}

}  // namespace

TEST_CASE("The far end of the straight part of a function is its step") {
  const Line line({.name = "a"});
  CHECK(step_for(line, [](double t) { return 1 + std::sin(t); }) == close_to(0.1037, 1e-3));
  CHECK(step_for(line, [](double t) { return std::tanh(t / 1e-5); }) == close_to(1.037e-7, 1e-3));
  CHECK(step_for(line, [](double t) { return std::exp(t / 1e5); }) == close_to(103.7, 1e-3));
}

TEST_CASE("Probes stay inside the bounds, on the side with room") {
  for (const double t : whet::detail::probes(Line({.name = "a", .lower = -2.0, .upper = 1e-4}))) {
    CHECK(t < 0.0);
    CHECK(t >= -2.0);
  }
}

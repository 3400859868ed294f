#include <whet/derivatives/column_state.hpp>

#include <cmath>

#include <doctest/doctest.h>

#include <derivatives/random_functions.hpp>

using whet::detail::ColumnError;
using whet::detail::ColumnState;
using whet::detail::Metric;

namespace {

/// The column of a noisy element beside an even one without a derivative.
struct Probe : ColumnState {
  Probe(const Metric& sizes, double level) : ColumnState(data(0.0, level), sizes) {
    for (const double t : {0.1, -0.1, 0.05, -0.05, 0.025, -0.025, 0.0125, -0.0125}) {
      readings.add(t, data(t, level));
    }
    update(1.0);
  }
  static Eigen::VectorXd data(double t, double level) {
    return Eigen::VectorXd{{std::cos(t + 0.5) + level * whet::test::hash_noise(t), 3.0 + t * t}};
  }
};

const auto length = [](const Eigen::VectorXd& data) { return data.norm(); };
const auto size = [](const ColumnError& e) { return (e.truncation.cwiseAbs() + e.noise).norm(); };

}  // namespace

TEST_CASE("Noise counts as seen where the elements that carry it have seen it") {
  const Metric metric{.length = length, .size = size};
  const Probe noisy(metric, 1e-6);
  CHECK(noisy.confirmed(noisy.totals().noise));
  CHECK(noisy.totals().noise > 1e-6);
}

TEST_CASE("A kink widens the claim to most of the jump of the slope") {
  Probe column({.length = length, .size = size}, 0.0);
  column.kinks.slope(1) = 5.0;
  CHECK(std::abs(column.error().truncation(1)) == 3.0);
  CHECK(std::abs(column.error().truncation(0)) < 1e-6);
}

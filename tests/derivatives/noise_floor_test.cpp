#include <whet/derivatives/noise_floor.hpp>

#include <cmath>

#include <doctest/doctest.h>

#include <derivatives/random_functions.hpp>

using whet::detail::NoiseFloor;
using whet::detail::Readings;
using whet::detail::Windows;
using whet::test::hash_noise;

namespace {

const std::vector<double> steps{0.1, -0.1, 0.05, -0.05, 0.025, -0.025, 0.0125, -0.0125};

/// n smooth elements; `noise(i, k)` is added to element i of call k, 0 the fiducial one.
template <class Noise>
Readings readings(Eigen::Index n, Noise noise) {
  const auto smooth = [](Eigen::Index i, double t) {
    return (i % 2 == 0 ? 1.0 : -1.0) * std::exp((0.3 + 0.01 * static_cast<double>(i)) * t);
  };
  Readings all{.origin = Eigen::VectorXd(n)};
  for (Eigen::Index i = 0; i < n; ++i) all.origin(i) = smooth(i, 0.0) * (1.0 + noise(i, 0));
  for (std::size_t k = 0; k < steps.size(); ++k) {
    Eigen::VectorXd data(n);
    for (Eigen::Index i = 0; i < n; ++i) {
      data(i) = smooth(i, steps[k]) * (1.0 + noise(i, static_cast<int>(k) + 1));
    }
    all.add(steps[k], data);
  }
  return all;
}

NoiseFloor floor_of(const Readings& all) {
  return whet::detail::noise_floor(all, Windows(all.displacements), {});
}

bool shown(const Readings& all) {
  return whet::detail::shown_independent(floor_of(all), all.origin,
                                         Eigen::VectorXd::Ones(all.elements()));
}

double draw(int seed, Eigen::Index i, int k) {
  return hash_noise(static_cast<double>(i) + 1000.0 * k, static_cast<std::uint64_t>(seed));
}

}  // namespace

TEST_CASE("The level of white noise is confirmed, and nine times in ten within a factor of ten") {
  int seen = 0, near = 0;
  for (int seed = 0; seed < 200; ++seed) {
    const auto noise =
        floor_of(readings(1, [&](Eigen::Index i, int k) { return 1e-7 * draw(seed, i, k); }));
    seen += noise.confirmed(0);
    near += noise.level(0) > 0.5e-7 && noise.level(0) < 1e-6;
  }
  CHECK(seen >= 190);
  CHECK(near >= 180);
}

TEST_CASE("Smooth elements beside a noisy one do not confirm its noise, nor share it") {
  const auto noise = floor_of(
      readings(3, [](Eigen::Index i, int k) { return i == 1 ? 1e-6 * draw(5, i, k) : 0.0; }));
  CHECK(noise.level(0) < 1e-12);
  CHECK(noise.level(1) > 1e-7);
}

TEST_CASE("Noise drawn for every element and call is shown to be independent") {
  int shown_count = 0;
  for (int seed = 0; seed < 50; ++seed) {
    shown_count +=
        shown(readings(40, [&](Eigen::Index i, int k) { return 1e-6 * draw(seed, i, k); }));
  }
  CHECK(shown_count >= 46);
}

TEST_CASE("One relative jitter for all elements of a call is found dependent") {
  for (const Eigen::Index n : {16, 40, 400}) {
    for (int seed = 0; seed < 20; ++seed) {
      CHECK(!shown(readings(n, [&](Eigen::Index, int k) { return 1e-6 * draw(seed, 0, k); })));
    }
  }
}

TEST_CASE("Noise alike in neighbours, or a fixed pattern of signs, is found dependent") {
  for (int seed = 0; seed < 20; ++seed) {
    CHECK(
        !shown(readings(100, [&](Eigen::Index i, int k) { return 1e-6 * draw(seed, i / 10, k); })));
    CHECK(!shown(readings(100, [&](Eigen::Index i, int k) {
      return 1e-6 * draw(seed, 0, k) * (draw(99, i, 0) > 0 ? 1.0 : -1.0);
    })));
  }
}

TEST_CASE("Fewer than sixteen elements show nothing") {
  CHECK(!shown(readings(15, [](Eigen::Index i, int k) { return 1e-6 * draw(1, i, k); })));
}

TEST_CASE("Elements near zero have no say in the relative noise of the others") {
  Readings all = readings(12, [](Eigen::Index, int) { return 0.0; });
  const double clean = floor_of(all).level(0);
  for (Eigen::Index i = 3; i < 12; ++i) {  // wings that change by as much as themselves
    all.origin(i) = 1e-9;
    for (std::size_t k = 0; k < steps.size(); ++k) {
      all.values(i, static_cast<Eigen::Index>(k)) = 1e-9 * std::exp(60.0 * steps[k]);
    }
  }
  CHECK(floor_of(all).level(0) < 10.0 * clean);
}

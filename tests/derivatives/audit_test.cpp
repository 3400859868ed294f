#include <whet/derivatives/audit.hpp>

#include <cmath>
#include <limits>

#include <doctest/doctest.h>

#include <derivatives/random_functions.hpp>

using whet::detail::Finding;
using whet::detail::Kinks;
using whet::detail::NoiseBounds;
using whet::detail::Readings;

namespace {

template <class F>
Readings audited(F f) {
  Readings all{.origin = Eigen::VectorXd::Constant(1, f(0.0))};
  for (const double t : {1e-3, -1e-3, 1e-6, -1e-6}) {
    all.add(t, Eigen::VectorXd::Constant(1, f(t)));
  }
  return all;
}

NoiseBounds no_bounds() {
  return {Eigen::VectorXd::Zero(1),
          Eigen::VectorXd::Constant(1, std::numeric_limits<double>::infinity())};
}

int settled(const Readings& audit, double slope, bool of_value, double crowd = 0.0) {
  Kinks kinks = Kinks::none(1);
  kinks.slope(0) = slope;
  kinks.of_value(0) = of_value;
  return whet::detail::settle_kink(audit, 0, 1e-12, crowd, kinks, 0.05);
}

}  // namespace

TEST_CASE("White noise is white at every step, and its level is bounded") {
  const auto f = [](double t) { return 1 + t + 1e-5 * whet::test::hash_noise(t); };
  NoiseBounds bounds = no_bounds();
  CHECK(whet::detail::judge_audit(audited(f), 0, 3e-5, 1.0, 1.0, 1e-3, bounds) ==
        Finding::white_noise);
  CHECK(bounds.most(0) < 1e-4);
  CHECK(bounds.least(0) > 1e-6);
}

TEST_CASE("A smooth function near the fiducial point refutes the noise of its ladder") {
  NoiseBounds bounds = no_bounds();
  const auto f = [](double t) { return std::cos(130 * t + 0.3); };
  // As large as the values: structure. Smaller, with the slope of the ladder: no noise.
  CHECK(whet::detail::judge_audit(audited(f), 0, 0.3, 0.8, 5.0, 10.0, bounds) ==
        Finding::structure);
  CHECK(whet::detail::judge_audit(audited(f), 0, 2e-4, 0.8, -130 * std::sin(0.3), 40.0, bounds) ==
        Finding::none);
  // Another slope than the ladder's: steps or jitter.
  CHECK(whet::detail::judge_audit(audited(f), 0, 4e-2 / 9, 0.8, -20.0, 0.7, bounds) ==
        Finding::correlated);
}

TEST_CASE("An audit settles kinks and jumps") {
  CHECK(settled(audited([](double t) { return std::abs(t); }), 2.0, false) == 1);
  CHECK(settled(audited([](double t) { return t * t; }), 2.0, false) == -1);
  CHECK(settled(audited([](double t) { return t > 0 ? 1.0 : 0.0; }), 20.0, true) == 1);
  CHECK(settled(audited([](double t) { return t; }), 20.0, true) == -1);
}

TEST_CASE("A kink or a jump is settled only above the noise that the elements beside it show") {
  const Readings kink = audited([](double t) { return 1 + std::abs(t); });
  const Readings jump = audited([](double t) { return t > 0 ? 1.02 : 1.0; });
  for (const double crowd : {0.0, 1e-9}) {
    CHECK(settled(kink, 2.0, false, crowd) == 1);
    CHECK(settled(jump, 0.4, true, crowd) == 1);
  }
  CHECK(settled(kink, 2.0, false, 1e-6) == 0);
  CHECK(settled(jump, 0.4, true, 1e-2) == 0);
}

TEST_CASE("The noise beside a suspect is seen by the audit, and none where all are suspects") {
  Readings audit{.origin = Eigen::VectorXd{{1.0, 10.0, 10.0}}};
  for (const double t : {1e-3, -1e-3, 1e-6, -1e-6}) {
    const double noise = 1e-4 * whet::test::hash_noise(t);
    audit.add(t, Eigen::VectorXd{{1.0 + std::abs(t), 10.0 + noise, 10.0 - noise}});
  }
  Kinks suspected = Kinks::none(3);
  suspected.slope(0) = 2.0;
  const auto crowd = whet::detail::crowd_noise(audit, suspected);
  CHECK(crowd.at(1.0) > 1e-6);
  CHECK(crowd.at(1.0) < 1e-3);
  CHECK(crowd.at(1e4) > 100.0 * crowd.at(1.0));  // of a larger value the relative noise
  suspected.slope.setOnes();
  CHECK(whet::detail::crowd_noise(audit, suspected).at(1.0) == 0.0);
}

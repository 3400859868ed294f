#include <whet/assembly/goals.hpp>

#include <cmath>
#include <limits>
#include <string>

#include <doctest/doctest.h>

#include <information/random_problems.hpp>
#include <support/close_to.hpp>

using whet::GaussianPrior;
using whet::Information;
using whet::InformationOptions;
using whet::detail::Goals;
using whet::detail::goals_of;
using whet::test::Draws;
using whet::test::information_of;
using whet::test::named;
using whet::test::true_sigmas;

TEST_CASE("Errors made as small as the goals say reach the accuracy that was asked for") {
  Draws draws(1);
  for (int trial = 0; trial < 500; ++trial) {
    const Eigen::Index count = draws.integer(1, 7);
    Eigen::MatrixXd rows = draws.normal(count + 6, count);
    if (count > 1) rows.col(0) = rows.col(1) + draws.decades(-3.0, 0.0) * rows.col(0);
    for (Eigen::Index p = 0; p < count; ++p) rows.col(p) *= draws.decades(-12.0, 12.0);
    const Eigen::VectorXd sigmas = true_sigmas(rows);
    InformationOptions options{.accuracy = draws.decades(-6.0, -1.0)};
    if (trial % 3 == 0) options.given = GaussianPrior("p0", draws.decades(-2.0, 2.0) * sigmas(0));
    if (trial % 3 == 1) {  // another probe, whose own errors are of the size allowed or larger
      options.given = information_of(
          named(count), draws.normal(count, count) * sigmas.cwiseInverse().asDiagonal(),
          draws.decades(-2.0, 0.5) * options.accuracy / static_cast<double>(count) *
              sigmas.cwiseInverse());
    }
    Eigen::VectorXd sizes(count);
    for (Eigen::Index p = 0; p < count; ++p) sizes(p) = draws.decades(-6.0, -1.0) / sigmas(p);
    bool done = false;
    for (int round = 0; round < 20 && !done; ++round) {
      const Goals goals = goals_of(information_of(named(count), rows, sizes), options);
      done = (goals.sizes.array() == std::numeric_limits<double>::infinity()).all();
      if (done && trial % 3 != 1) {
        INFO("trial ", trial);
        CHECK(goals.reached <= options.accuracy);
      }
      for (Eigen::Index p = 0; p < count; ++p) {
        if (goals.sizes(p) < sizes(p)) sizes(p) = 0.999 * goals.sizes(p);
      }
    }
    CHECK(done);
  }
}

TEST_CASE("Derivatives that are sharp enough are left alone") {
  Draws draws(2);
  const Eigen::MatrixXd rows = draws.normal(9, 3);
  const Eigen::VectorXd sizes = 1e-8 * rows.colwise().norm().transpose();
  const Goals goals = goals_of(information_of(named(3), rows, sizes), {});
  CHECK(goals.reached <= 1e-6);
  CHECK_FALSE(goals.unmeasured);
  for (Eigen::Index p = 0; p < 3; ++p) {
    CHECK(goals.sizes(p) == std::numeric_limits<double>::infinity());
    CHECK(goals.excess(p) <= 1.0);
  }
}

TEST_CASE("Only the column that matters is refined, and none beside a prior that rules") {
  Eigen::MatrixXd rows(3, 2);
  rows << 1.0, 0.0, 0.0, 1.0, 0.0, 0.0;
  const Information own = information_of(named(2), rows, Eigen::Vector2d(0.01, 1e-9));
  const Goals alone = goals_of(own, {});
  CHECK(alone.excess(0) > 1.0);
  CHECK(alone.excess(1) <= 1.0);
  const Goals beside = goals_of(own, {.given = GaussianPrior("p0", 0.01)});
  CHECK(beside.excess(0) <= 1.0);
  CHECK(beside.reached <= 1e-3);
}

TEST_CASE("What carries an unmeasured direction is refined by a factor") {
  const Eigen::MatrixXd rows{{1.0, 1.0, 0.0}, {1.0, 1.0, 1.0}};
  const Eigen::Vector3d sizes(1e-4, 1e-8, 1e-8);
  const Goals goals = goals_of(information_of(named(3), rows, sizes), {});
  CHECK(goals.unmeasured);
  CHECK(goals.sizes(0) == whet::test::close_to(1e-5, 1e-12));
  CHECK(goals.sizes(1) == std::numeric_limits<double>::infinity());
  CHECK(goals.sizes(2) == std::numeric_limits<double>::infinity());
}

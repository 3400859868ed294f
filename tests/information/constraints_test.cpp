#include <whet/information/constraints.hpp>

#include <cmath>

#include <doctest/doctest.h>

#include <information/random_problems.hpp>
#include <support/close_to.hpp>

using whet::NumericalErrors;
using whet::test::close_to;
using whet::test::Draws;

namespace {

Eigen::MatrixXd root_of(const Eigen::MatrixXd& rows) { return whet::detail::root_of<double>(rows); }

}  // namespace

TEST_CASE("A A^T is the inverse of F where everything is measured") {
  Draws draws(1);
  const Eigen::MatrixXd rows = draws.normal(9, 4);
  const auto solved = whet::detail::solve<double>(root_of(rows), 4, NumericalErrors::none(4));
  CHECK(solved.null.size() == 0);
  const Eigen::MatrixXd unit = solved.half * solved.half.transpose() * rows.transpose() * rows;
  CHECK((unit - Eigen::MatrixXd::Identity(4, 4)).norm() <= 1e-12);
  for (Eigen::Index p = 0; p < 4; ++p) CHECK(solved.measured(p));
}

TEST_CASE("A null direction is held by a row of its own, and lends the rest nothing") {
  // p0 and p1 are seen through their sum s, beside p2: rows (s, p2).
  Draws draws(2);
  const Eigen::MatrixXd two = draws.normal(9, 2);
  Eigen::MatrixXd rows(9, 3);
  rows << two.col(0), two.col(0), two.col(1);
  const auto solved = whet::detail::solve<double>(root_of(rows), 3, NumericalErrors::none(3));
  REQUIRE(solved.null.size() == 1);
  const Eigen::VectorXd x = solved.null.directions.col(0);
  CHECK(x(0) == close_to(-x(1), 1e-12));
  CHECK(std::abs(x(2)) <= 1e-12 * std::abs(x(0)));
  CHECK((solved.null.fixing * x)(0) == close_to(1.0, 1e-14));
  CHECK_FALSE(solved.measured(0));
  CHECK_FALSE(solved.measured(1));
  const auto reduced = whet::detail::solve<double>(root_of(two), 2, NumericalErrors::none(2));
  CHECK(solved.sigmas(2) == close_to(reduced.sigmas(1), 1e-13));
  // The sum is measured as before: half the rows of A add up.
  const Eigen::VectorXd sum = solved.half.row(0) + solved.half.row(1);
  CHECK(sum.norm() == close_to(reduced.sigmas(0), 1e-13));
}

TEST_CASE("Shifts ride along in the solution") {
  const Eigen::MatrixXd rows{{1.0, 0.0, 3.0}, {0.0, 2.0, 4.0}};
  const auto solved = whet::detail::solve<double>(root_of(rows), 2, NumericalErrors::none(2));
  const Eigen::VectorXd bias = solved.half * solved.root.col(2).head(2);
  CHECK(bias(0) == close_to(3.0, 1e-15));
  CHECK(bias(1) == close_to(2.0, 1e-15));
}

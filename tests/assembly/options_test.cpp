#include <whet/assembly/options.hpp>

#include <vector>

#include <doctest/doctest.h>

#include <support/close_to.hpp>

using whet::GaussianPrior;
using whet::Given;
using whet::Information;
using whet::test::close_to;

TEST_CASE(
    "What is given is joined, informations before priors, and nothing given changes nothing") {
  const Information own = Information::from_matrix({{"x", 1.0}}, Eigen::MatrixXd{{2.0}});
  const Information other = Information::from_matrix({{"y", 1.0}}, Eigen::MatrixXd{{3.0}});
  CHECK(Given().joined_to(own).matrix() == own.matrix());
  // The prior on y needs the information that knows y.
  const Information whole = Given{GaussianPrior("y", 0.5), other}.joined_to(own);
  CHECK(whole.matrix()(0, 0) == close_to(2.0, 1e-15));
  CHECK(whole.matrix()(1, 1) == close_to(7.0, 1e-15));
}

TEST_CASE("A shift is given as a list or as a vector") {
  const whet::Shift list("leak", std::vector<double>{1.0, 2.0}),
      vector("leak", Eigen::Vector2d(1.0, 2.0));
  CHECK(list.data == vector.data);
  CHECK(list.name == "leak");
}

#include <whet/assembly/assemble.hpp>

#include <cmath>
#include <limits>

#include <doctest/doctest.h>

#include <whet/covariances/diagonal_covariance.hpp>

#include <support/close_to.hpp>

using whet::Derivatives;
using whet::DiagonalCovariance;
using whet::Information;
using whet::NumericalErrors;
using whet::Parameters;
using whet::detail::Whitener;
using whet::test::close_to;

namespace {

const double eps = std::numeric_limits<double>::epsilon();

}  // namespace

TEST_CASE("Rows are whitened derivatives, and source p is the error of column p") {
  const Derivatives derivatives({{"x", 1.0}, {"y", 2.0}}, Eigen::Vector2d(5.0, 6.0),
                                Eigen::MatrixXd{{2.0, 0.0}, {0.0, 3.0}},
                                Eigen::MatrixXd{{0.02, 0.0}, {0.0, 0.06}});
  const auto noise = DiagonalCovariance::from_standard_deviations({0.5, 2.0});
  // Asked for in the other order.
  const Information information = whet::detail::assemble(
      {{"y", 2.0}, {"x", 1.0}}, derivatives, Whitener(noise),
      {.shifts = {{"leak", std::vector<double>{1.0, 4.0}}}, .name = "Plover"});
  CHECK(information.matrix()(0, 0) == close_to(2.25, 1e-15));
  CHECK(information.matrix()(1, 1) == close_to(16.0, 1e-15));
  const NumericalErrors errors = information.parts().root.errors();
  CHECK(errors.columns.sizes(0) == close_to(0.03 + 8.0 * eps * 1.5, 1e-14));
  CHECK(errors.columns.sizes(1) == close_to(0.04 + 8.0 * eps * 4.0, 1e-14));
  CHECK(errors.columns.rows == Eigen::MatrixXd::Identity(2, 2));
  CHECK(errors.matrices.empty());
  CHECK(information.parts().shifts == std::vector<std::string>{"leak"});
  CHECK(information.parts().experiments == std::vector<std::string>{"Plover"});
}

TEST_CASE("The rounding of a million rows stays below what is stated") {
  // Of one parameter, R is the length of the column: in long double beside.
  const Eigen::Index n = 1000000;
  const Eigen::VectorXd column = Eigen::VectorXd::LinSpaced(n, 0.9, 1.1);
  long double square = 0.0L;
  for (const double element : column) square += static_cast<long double>(element) * element;
  const auto length = static_cast<double>(std::sqrt(square));
  const auto noise = DiagonalCovariance::uniform(n, 1.0);
  const Parameters one{{"x", 1.0}};
  const Information information = whet::detail::assemble(
      one, Derivatives(one, Eigen::VectorXd::Zero(n), column), Whitener(noise), {});
  const double stated = information.parts().root.errors().columns.sizes(0);
  CHECK(std::abs(information.root()(0, 0) - length) <= stated);
  CHECK(stated <= 1e-13 * length);
}

TEST_CASE(
    "Independent noise counts by its largest element along the rows, and by its length in F") {
  Derivatives::Parts parts{.parameters = {{"x", 1.0}},
                           .mean = Eigen::VectorXd::Zero(4),
                           .values = Eigen::MatrixXd::Ones(4, 1),
                           .noise = Eigen::MatrixXd::Constant(4, 1, 0.1)};
  parts.reports.resize(1);
  const auto noise = DiagonalCovariance::uniform(4, 1.0);
  const auto errors = [&] {
    return whet::detail::assemble({{"x", 1.0}}, Derivatives(parts), Whitener(noise), {})
        .parts()
        .root.errors();
  };
  CHECK(errors().columns.sizes(0) == close_to(0.2 + 8.0 * eps * 2.0, 1e-14));
  CHECK(errors().matrices.empty());
  parts.reports[0].independent_noise = true;
  CHECK(errors().columns.sizes(0) == close_to(0.1 + 8.0 * eps * 2.0, 1e-14));
  REQUIRE(errors().matrices.size() == 1);
  CHECK(errors().matrices[0].sizes(0) == close_to(0.2, 1e-15));
}

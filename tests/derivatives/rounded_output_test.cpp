#include <whet/derivatives/rounded_output.hpp>

#include <cmath>
#include <random>

#include <doctest/doctest.h>

#include <derivatives/random_functions.hpp>
#include <support/close_to.hpp>

using whet::detail::rounding_quantum;
using whet::test::close_to;
using whet::test::printed;

TEST_CASE("The quantum of printed output is found at every size and number of digits") {
  for (const double unit : {1.0, 3.7e-21, 8.1e15}) {
    for (int digits = 3; digits <= 11; ++digits) {
      Eigen::RowVectorXd values(6);
      for (Eigen::Index k = 0; k < 6; ++k) {
        values(k) = printed(unit * std::exp(0.11 * static_cast<double>(k + 1)), digits);
      }
      const double origin = printed(unit * 1.23456789123456, digits);
      const double quantum = std::pow(10.0, std::floor(std::log10(origin)) - digits + 1);
      CHECK(rounding_quantum(origin, values) == close_to(quantum, 1e-9));
    }
  }
}

TEST_CASE("Single precision is seen, double precision is not rounded") {
  Eigen::RowVectorXd values(4), full(4);
  for (Eigen::Index k = 0; k < 4; ++k) {
    full(k) = std::sin(1.0 + 0.1 * static_cast<double>(k));
    values(k) = static_cast<double>(static_cast<float>(full(k)));
  }
  CHECK(rounding_quantum(0.75, values) == std::ldexp(1.0, -24));
  CHECK(rounding_quantum(std::sin(0.9), full) == 0.0);
}

TEST_CASE("A constant of few digits is a constant, one that looks printed is not trusted") {
  const Eigen::RowVectorXd sevens = Eigen::RowVectorXd::Constant(6, 7.0);
  CHECK(rounding_quantum(7.0, sevens) == 0.0);
  const Eigen::RowVectorXd printed = Eigen::RowVectorXd::Constant(6, 7.12345);
  CHECK(rounding_quantum(7.12345, printed) == close_to(1e-5, 1e-9));
}

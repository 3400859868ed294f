#include <whet/derivatives/window.hpp>

#include <cmath>
#include <vector>

#include <doctest/doctest.h>

#include <support/close_to.hpp>

using whet::detail::derivative_weights;
using whet::detail::difference_weights;
using whet::detail::Windows;
using whet::test::close_to;

TEST_CASE("Weights on an even grid are Fornberg's") {
  // Fornberg (1988), tables of central and one-sided first derivatives; recomputed as rationals.
  const std::vector<std::vector<double>> central{{1.0 / 2},
                                                 {2.0 / 3, -1.0 / 12},
                                                 {3.0 / 4, -3.0 / 20, 1.0 / 60},
                                                 {4.0 / 5, -1.0 / 5, 4.0 / 105, -1.0 / 280}};
  for (const auto& expected : central) {
    std::vector<double> t;
    for (std::size_t k = 1; k <= expected.size(); ++k) {
      t.push_back(static_cast<double>(k)), t.push_back(-static_cast<double>(k));
    }
    const Eigen::VectorXd w = derivative_weights(t);
    for (std::size_t k = 0; k < expected.size(); ++k) {
      const auto at = static_cast<Eigen::Index>(2 * k);
      CHECK(w(at) == close_to(expected[k], 1e-13));
      CHECK(w(at + 1) == close_to(-expected[k], 1e-13));
    }
  }
  const std::vector<std::vector<double>> forward{
      {-1, 1},
      {-3.0 / 2, 2, -1.0 / 2},
      {-25.0 / 12, 4, -3, 4.0 / 3, -1.0 / 4},
      {-761.0 / 280, 8, -14, 56.0 / 3, -35.0 / 2, 56.0 / 5, -14.0 / 3, 8.0 / 7, -1.0 / 8}};
  for (const auto& expected : forward) {
    std::vector<double> t;
    for (std::size_t k = 1; k < expected.size(); ++k) t.push_back(static_cast<double>(k));
    const Eigen::VectorXd w = derivative_weights(t);
    CHECK(-w.sum() == close_to(expected[0], 1e-12));
    for (std::size_t k = 1; k < expected.size(); ++k) {
      CHECK(w(static_cast<Eigen::Index>(k - 1)) == close_to(expected[k], 1e-12));
    }
  }
}

TEST_CASE("The highest divided difference has Fornberg's weights of the highest derivative") {
  // 1, -4, 6, -4, 1: the fourth derivative on five points, order 2; here the largest is 1.
  const Eigen::VectorXd c = difference_weights(std::vector<double>{-2e-9, -1e-9, 0, 1e-9, 2e-9});
  const std::vector<double> expected{1.0 / 6, -4.0 / 6, 1, -4.0 / 6, 1.0 / 6};
  for (std::size_t k = 0; k < 5; ++k) {
    CHECK(c(static_cast<Eigen::Index>(k)) == close_to(expected[k], 1e-12));
  }
}

TEST_CASE("Windows over pairs are Richardson's tableau") {
  // exp(sin x) at 1: T_00 ... T_33 of the tableau with h = 0.2 (Richardson 1911), to 15 digits,
  // computed with rationals and 30 digits; the exact derivative is 1.25338076749345.
  const auto f = [](double x) { return std::exp(std::sin(x)); };
  const std::vector<double> t{0.2, -0.2, 0.1, -0.1, 0.05, -0.05, 0.025, -0.025};
  const Windows windows(t);
  Eigen::RowVectorXd d(8);
  for (std::size_t k = 0; k < 8; ++k) d(static_cast<Eigen::Index>(k)) = f(1.0 + t[k]) - f(1.0);
  const Eigen::RowVectorXd T = d * windows.weights();
  CHECK(T(windows.find(0, 3, 3)) == close_to(1.22668470554126, 1e-13));
  CHECK(T(windows.find(0, 2, 3)) == close_to(1.25330238183099, 1e-13));
  CHECK(T(windows.find(0, 1, 3)) == close_to(1.25338072769116, 1e-13));
  CHECK(T(windows.find(0, 0, 2)) == close_to(1.25338076686795, 1e-13));
  CHECK(T(windows.find(0, 0, 3)) == close_to(1.25338076748981, 1e-13));
}

TEST_CASE("One-sided windows at halved steps are Richardson's in h") {
  // (4 T(h/2) - T(h)) with T = d/t: 2 T(h/2) - T(h), by hand.
  const Windows windows({0.5, 0.25});
  const Eigen::MatrixXd& w = windows.weights();
  const Eigen::Index both = windows.find(0, 0, 1);
  CHECK(w(0, both) == close_to(-1 / 0.5, 1e-14));
  CHECK(w(1, both) == close_to(2 / 0.25, 1e-14));
}

TEST_CASE("A window of any spacing differentiates every polynomial of its degree exactly") {
  const std::vector<double> t{0.3, -0.31, 1e-3, 0.02, -0.5};
  const Eigen::VectorXd w = derivative_weights(t);
  for (int power = 1; power <= 5; ++power) {
    double sum = 0.0;
    for (std::size_t k = 0; k < t.size(); ++k) {
      sum += w(static_cast<Eigen::Index>(k)) * std::pow(t[k], power);
    }
    CHECK(std::abs(sum - (power == 1 ? 1.0 : 0.0)) < 1e-12);
  }
}

TEST_CASE("Points of equal step on both sides make a rung, others stand alone") {
  const auto all = whet::detail::rungs(std::vector<double>{0.2, -0.1, -0.2, 0.4});
  REQUIRE(all.size() == 3);
  CHECK(!all[0].paired());
  CHECK(all[1].paired());
  CHECK(all[2].plus == 3);
}

#include <whet/information/replacing.hpp>

#include <cmath>
#include <string>
#include <vector>

#include <doctest/doctest.h>

#include <whet/forecasts/forecast.hpp>

#include <information/random_problems.hpp>
#include <support/close_to.hpp>

using whet::Forecast;
using whet::Information;
using whet::ParameterError;
using whet::Parameters;
using whet::test::close_to;
using whet::test::Draws;
using whet::test::information_of;
using whet::test::named;
using whet::test::true_sigmas;

namespace {

const Parameters abc{{"a", 2.0}, {"b", 0.5}, {"c", 1.0}};
const Parameters product_and_ratio{{"u", 1.0}, {"v", 4.0}};

const auto to_a_and_b = whet::exact([](const auto& at) {
  using std::sqrt;
  return std::vector{sqrt(at["u"] * at["v"]), sqrt(at["u"] / at["v"])};
});
const auto to_u_and_v = whet::exact([](const auto& at) {
  return std::vector{at["a"] * at["b"], at["a"] / at["b"]};
});

Information base() {
  return Information::from_matrix(
      abc, Eigen::Matrix3d{{20.0, 4.0, 3.0}, {4.0, 10.0, 2.0}, {3.0, 2.0, 5.0}});
}

}  // namespace

TEST_CASE("Product and ratio in place of two parameters: F' = J^T F J") {
  // (a, b, c) to (u = a b, v = a / b, c) at a = 2, b = 0.5. Values: independent evaluation at 50
  // digits (mpmath).
  const Information changed = base().replacing({"a", "b"}, product_and_ratio, to_a_and_b);
  const Eigen::Matrix3d wanted{{22.6250000000000, 4.84375000000000, 3.50000000000000},
                               {4.84375000000000, 1.16406250000000, 0.625000000000000},
                               {3.50000000000000, 0.625000000000000, 5.00000000000000}};
  CHECK((changed.matrix() - wanted).norm() <= 1e-14 * wanted.norm());
  CHECK(changed.parameters().names() == std::vector<std::string>{"u", "v", "c"});
  CHECK(Forecast(changed).sigma("u") == close_to(0.659896703392182, 3e-15));
  CHECK(Forecast(changed).sigma("v") == close_to(2.84433218241291, 3e-15));
}

TEST_CASE("Numerical derivatives of the function state their error, and it holds") {
  const auto by_steps = [](const whet::Point<double>& at) {
    return std::vector<double>{std::sqrt(at["u"] * at["v"]), std::sqrt(at["u"] / at["v"])};
  };
  const Forecast forecast(base().replacing({"a", "b"}, product_and_ratio, by_steps));
  CHECK(std::abs(forecast.sigma("u") - 0.659896703392182) <= forecast.numerical_error("u") + 1e-15);
  CHECK(std::abs(forecast.sigma("v") - 2.84433218241291) <= forecast.numerical_error("v") + 1e-14);
  CHECK(forecast.numerical_error("v") <= 1e-8 * forecast.sigma("v"));
}

TEST_CASE("There and back again is where it was, and known again") {
  const Information there = base().replacing({"a", "b"}, product_and_ratio, to_a_and_b);
  const Information back = there.replacing({"u", "v"}, {{"a", 2.0}, {"b", 0.5}}, to_u_and_v);
  CHECK((back.matrix() - base().matrix()).norm() <= 1e-14 * base().matrix().norm());
  CHECK(back.parameters().names() == abc.names());
  CHECK_NOTHROW((void)(back + base()));
  CHECK_THROWS_AS((void)(there + base()), ParameterError);
}

TEST_CASE("Two replacings in a row are one by their product") {
  Draws draws(1);
  const Information a = information_of({{"x", 3.0}, {"y", 0.5}}, draws.normal(7, 2));
  const auto first =
      whet::exact([](const auto& at) { return std::vector{2.0 * at["s"] + at["t"]}; });
  const auto squares = whet::exact([](const auto& at) {
    return std::vector{at["p"] * at["p"], at["q"]};
  });
  const auto both =
      whet::exact([](const auto& at) { return std::vector{2.0 * at["p"] * at["p"] + at["q"]}; });
  // One old parameter, two new ones: y stays, x = 2 s + t has a direction that moves nothing.
  CHECK_THROWS_AS((void)a.replacing({"x"}, {{"s", 1.0}, {"t", 1.0}}, first), ParameterError);
  const Information b = information_of({{"s", 1.0}, {"t", 1.0}, {"y", 0.5}}, draws.normal(9, 3));
  const Information in_steps =
      b.replacing({"s"}, {{"m", 2.0}},
                  whet::exact([](const auto& at) { return std::vector{0.5 * at["m"]}; }))
          .replacing({"m", "t"}, {{"p", std::sqrt(2.0)}, {"q", 1.0}}, squares);
  const Information at_once =
      b.replacing({"s", "t"}, {{"p", std::sqrt(2.0)}, {"q", 1.0}}, whet::exact([](const auto& at) {
                    return std::vector{0.5 * at["p"] * at["p"], at["q"]};
                  }));
  CHECK((in_steps.matrix() - at_once.matrix()).norm() <= 1e-14 * at_once.matrix().norm());
  (void)both;
}

TEST_CASE("Fewer new parameters than old ones restrict the model to a line") {
  // x = t, y = 2 t: F' = F_xx + 4 F_xy + 4 F_yy, by hand.
  const Information a =
      Information::from_matrix({{"x", 1.0}, {"y", 2.0}}, Eigen::Matrix2d{{3.0, 1.0}, {1.0, 2.0}});
  const Information line = a.replacing({"x", "y"}, {{"t", 1.0}}, whet::exact([](const auto& at) {
                                         return std::vector{at["t"], 2.0 * at["t"]};
                                       }));
  CHECK(Forecast(line).sigma("t") == close_to(1.0 / std::sqrt(15.0), 1e-14));
}

TEST_CASE("Along a near degeneracy the stated error still holds after a change of parameters") {
  Draws draws(2);
  for (int trial = 0; trial < 300; ++trial) {
    Eigen::MatrixXd exact = draws.normal(9, 3);
    exact.col(1) = exact.col(0) + draws.decades(-5.0, -1.0) * exact.col(1);
    const Eigen::VectorXd sigmas = true_sigmas(exact);
    const Eigen::VectorXd sizes = draws.decades(-6.0, -1.0) * sigmas.cwiseInverse();
    Eigen::MatrixXd given = exact;
    for (Eigen::Index p = 0; p < 3; ++p) {
      const Eigen::VectorXd off = draws.normal(9, 1);
      given.col(p) += 0.999 * sizes(p) / off.norm() * off;
    }
    // Sum and difference in place of the two.
    const auto halves = whet::exact([](const auto& at) {
      return std::vector{0.5 * (at["sum"] + at["gap"]), 0.5 * (at["sum"] - at["gap"])};
    });
    const Information information =
        information_of(named(3), given, sizes)
            .replacing({"p0", "p1"}, {{"sum", 2.0}, {"gap", 0.0}}, halves);
    const Eigen::Matrix3d jacobian{{0.5, 0.5, 0.0}, {0.5, -0.5, 0.0}, {0.0, 0.0, 1.0}};
    const Eigen::VectorXd truth = true_sigmas(Eigen::MatrixXd(exact * jacobian));
    for (const Information& each : {information, information.integrating_out({"gap"})}) {
      const Forecast forecast(each);
      CHECK(std::abs(forecast.sigma("sum") - truth(0)) <= forecast.numerical_error("sum"));
      CHECK(std::abs(forecast.sigma("p2") - truth(2)) <= forecast.numerical_error("p2"));
    }
  }
}

TEST_CASE("A change of parameters that is none is refused with the reason") {
  const Information a = base();
  const auto refused = [](const auto& call, const char* words) {
    CHECK_THROWS_WITH_AS((void)call(), doctest::Contains(words), ParameterError);
  };
  refused(
      [&] {
        return a.replacing({"a", "b"}, {{"u", 1.0}, {"v", 4.1}}, to_a_and_b);
      },
      "expected 2, its fiducial value");
  refused([&] { return a.replacing({}, product_and_ratio, to_a_and_b); },
          "number of parameters to replace: got 0");
  refused([&] { return a.replacing({"a", "d"}, product_and_ratio, to_a_and_b); }, "\"d\"");
  refused([&] { return a.replacing({"a"}, product_and_ratio, to_a_and_b); },
          "number of values of the function: got 2, expected 1");
  // The new parameter clashes with one that stays.
  const auto same = whet::exact([](const auto& at) { return std::vector{at["b"]}; });
  refused([&] { return a.replacing({"a"}, {{"b", 2.0}}, same); }, "\"b\" is given twice");
  // Only the product is seen: a singular Jacobian.
  const auto singular = whet::exact([](const auto& at) {
    return std::vector{at["x"] * at["y"], 0.25 * at["x"] * at["y"]};
  });
  refused(
      [&] {
        return a.replacing({"a", "b"}, {{"x", 1.0}, {"y", 2.0}}, singular);
      },
      "a singular one");
  const auto idle = whet::exact([](const auto& at) {
    return std::vector{at["x"], 0.5 + 0.0 * at["y"]};
  });
  refused(
      [&] {
        return a.replacing({"a", "b"}, {{"x", 2.0}, {"y", 2.0}}, idle);
      },
      "a direction with a part along \"y\" moves none of them");
  refused(
      [&] {
        return a.holding({"c"}).replacing(
            {"a"}, {{"c", 2.0}}, whet::exact([](const auto& at) { return std::vector{at["c"]}; }));
      },
      "parameter \"c\" was held");
}

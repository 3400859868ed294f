#include <whet/likelihoods/poisson_likelihood.hpp>

#include <cmath>
#include <vector>

#include <doctest/doctest.h>

#include <whet/assembly/expected_information.hpp>
#include <whet/forecasts/forecast.hpp>
#include <whet/observables/exact.hpp>
#include <whet/observables/tabulate.hpp>

#include <support/close_to.hpp>

using whet::expected_information;
using whet::Forecast;
using whet::Information;
using whet::ObservableError;
using whet::PoissonLikelihood;
using whet::test::close_to;

TEST_CASE("Counts along a line have the sums of 1 / mu, and their identities") {
  // a = 3, b = 2, x = 0..5: computed at 50 digits (mpmath).
  const std::vector<double> points{0, 1, 2, 3, 4, 5};
  const auto counts = whet::exact([&points](const auto& at) {
    return whet::tabulate(points, [&](double x) { return at["a"] + at["b"] * x; });
  });
  const Information information =
      expected_information({{"a", 3.0}, {"b", 2.0}}, PoissonLikelihood(counts));
  const Eigen::MatrixXd f = information.matrix();
  CHECK(f(0, 0) == close_to(0.955133755133755, 3e-15));
  CHECK(f(0, 1) == close_to(1.56729936729937, 3e-15));
  CHECK(f(1, 1) == close_to(5.14905094905095, 3e-15));
  CHECK(Forecast(information).sigma("a") == close_to(1.44628674653754, 5e-15));
  CHECK(Forecast(information).sigma("b") == close_to(0.622906565904515, 5e-15));
  CHECK(3.0 * f(0, 0) + 2.0 * f(0, 1) == close_to(6.0, 1e-14));   // N
  CHECK(3.0 * f(0, 1) + 2.0 * f(1, 1) == close_to(15.0, 1e-14));  // sum of x
}

TEST_CASE("Bins of success and failure are a binomial of expected size") {
  // Poisson counts n p and n (1 - p): F = n / p + n / (1 - p) = n / (p (1 - p)), n = 40, p = 0.3;
  // computed at 50 digits (mpmath).
  const auto bins = whet::exact([](const auto& at) {
    return std::vector{40.0 * at["p"], 40.0 * (1.0 - at["p"])};
  });
  const Information information = expected_information({{"p", 0.3}}, PoissonLikelihood(bins));
  CHECK(information.matrix()(0, 0) == close_to(190.476190476190, 3e-15));
}

TEST_CASE("Information of counts does not depend on how they are binned where the shape is known") {
  // One rate r over bins of widths w: F = sum w / r.
  const std::vector<double> widths{0.5, 1.25, 3.0};
  const auto counts = whet::exact([&widths](const auto& at) {
    return whet::tabulate(widths, [&](double w) { return at["r"] * w; });
  });
  const Information information = expected_information({{"r", 2.5}}, PoissonLikelihood(counts));
  CHECK(information.matrix()(0, 0) == close_to(4.75 / 2.5, 1e-15));
}

TEST_CASE("A bin in which nothing is expected is refused by its number") {
  for (const double empty : {0.0, -2.0}) {
    const auto counts = whet::exact([empty](const auto& at) {
      return std::vector{at["a"], empty + 0.0 * at["a"]};
    });
    CHECK_THROWS_WITH_AS((void)expected_information({{"a", 1.0}}, PoissonLikelihood(counts)),
                         doctest::Contains("expected counts, element 1: got "), ObservableError);
  }
}

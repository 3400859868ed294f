#include <whet/likelihoods/gaussian_likelihood.hpp>

#include <cmath>
#include <numbers>
#include <string>
#include <vector>

#include <doctest/doctest.h>

#include <whet/assembly/expected_information.hpp>
#include <whet/covariances/dense_covariance.hpp>
#include <whet/covariances/diagonal_covariance.hpp>
#include <whet/forecasts/forecast.hpp>
#include <whet/observables/exact.hpp>
#include <whet/observables/tabulate.hpp>

#include <support/close_to.hpp>

using whet::CovarianceError;
using whet::DenseCovariance;
using whet::DiagonalCovariance;
using whet::expected_information;
using whet::Forecast;
using whet::GaussianLikelihood;
using whet::Information;
using whet::Parameters;
using whet::test::close_to;

// Where a value is "computed at 50 digits", it comes from an independent evaluation (mpmath) of the
// closed form, confirmed by a second route; 14 to 15 digits are given.

namespace {

std::vector<double> range(int count, double step) {
  std::vector<double> points;
  for (int i = 0; i < count; ++i) points.push_back(step * i);
  return points;
}

}  // namespace

TEST_CASE("A straight line has the closed form of its sums") {
  // x = 0..4, sigma = 0.5: computed at 50 digits.
  const auto points = range(5, 1.0);
  const auto line = whet::exact([&points](const auto& at) {
    return whet::tabulate(points, [&](double x) { return at["a"] + at["b"] * x; });
  });
  const Information information = expected_information(
      {{"a", 1.0}, {"b", 2.0}}, GaussianLikelihood(line, DiagonalCovariance::uniform(5, 0.5)));
  const Eigen::Matrix2d wanted{{20.0, 40.0}, {40.0, 120.0}};
  CHECK((information.matrix() - wanted).norm() <= 1e-14 * wanted.norm());
  const Forecast forecast(information);
  CHECK(forecast.sigma("a") == close_to(0.387298334620742, 3e-15));
  CHECK(forecast.sigma("b") == close_to(0.158113883008419, 3e-15));
  CHECK(forecast.correlation("a", "b") == close_to(-0.816496580927726, 3e-15));
}

TEST_CASE("A decay has the closed form of its geometric sums") {
  // y = A exp(-lambda t), t = j / 2, j = 0..7, A = 2, lambda = 0.7, sigma = 0.1: at 50 digits.
  const auto times = range(8, 0.5);
  const auto decay = [&times](const auto& at) {
    using std::exp;
    return whet::tabulate(times, [&](double t) { return at["A"] * exp(-at["lambda"] * t); });
  };
  const Parameters parameters{{"A", 2.0}, {"lambda", 0.7}};
  const DiagonalCovariance noise = DiagonalCovariance::uniform(8, 0.1);
  const Information exact =
      expected_information(parameters, GaussianLikelihood(whet::exact(decay), noise));
  CHECK(exact.matrix()(0, 0) == close_to(197.908830192494, 3e-15));
  CHECK(exact.matrix()(0, 1) == close_to(-189.347522646537, 3e-15));
  CHECK(exact.matrix()(1, 1) == close_to(521.769993740861, 3e-15));
  CHECK(Forecast(exact).sigma("A") == close_to(0.0879784046567674, 3e-15));
  CHECK(Forecast(exact).sigma("lambda") == close_to(0.0541837574448557, 3e-15));
  // The same by steps, to the accuracy that is stated.
  const auto in_double = [&decay](const whet::Point<double>& at) -> std::vector<double> {
    return decay(at);
  };
  const Forecast by_steps(expected_information(parameters, GaussianLikelihood(in_double, noise)));
  CHECK(std::abs(by_steps.sigma("A") - 0.0879784046567674) <= by_steps.numerical_error("A"));
  CHECK(std::abs(by_steps.sigma("lambda") - 0.0541837574448557) <=
        by_steps.numerical_error("lambda"));
  CHECK(by_steps.numerical_error("lambda") <= 1e-3 * by_steps.sigma("lambda"));
}

TEST_CASE("A decay under correlated noise, and the bias of an offset that is ignored") {
  // C_ij = 0.01 * 0.5^|i-j|, offset 0.03 in every datum: computed at 50 digits. Bias of an ignored
  // systematic: Huterer & Takada (2005), Taylor et al. (2007), Amara & Refregier (2008).
  const auto times = range(8, 0.5);
  const auto decay = whet::exact([&times](const auto& at) {
    using std::exp;
    return whet::tabulate(times, [&](double t) { return at["A"] * exp(-at["lambda"] * t); });
  });
  Eigen::MatrixXd covariance(8, 8);
  for (Eigen::Index i = 0; i < 8; ++i) {
    for (Eigen::Index j = 0; j < 8; ++j) {
      covariance(i, j) = 0.01 * std::pow(0.5, std::abs(static_cast<double>(i - j)));
    }
  }
  const Information information = expected_information(
      {{"A", 2.0}, {"lambda", 0.7}}, GaussianLikelihood(decay, DenseCovariance(covariance)),
      {.shifts = {{"offset", std::vector<double>(8, 0.03)}}});
  CHECK(information.matrix()(0, 0) == close_to(111.014172689265, 1e-14));
  CHECK(information.matrix()(0, 1) == close_to(-48.2052643999729, 1e-14));
  CHECK(information.matrix()(1, 1) == close_to(228.480649014745, 1e-14));
  const Forecast forecast(information);
  CHECK(forecast.sigma("A") == close_to(0.0995807819631371, 1e-14));
  CHECK(forecast.sigma("lambda") == close_to(0.0694128751679301, 1e-14));
  CHECK(forecast.bias("A", "offset") == close_to(0.0286144232064532, 1e-13));
  CHECK(forecast.bias("lambda", "offset") == close_to(-0.0226120351291086, 1e-13));
}

TEST_CASE("A curvature that is ignored shifts a straight line by known amounts") {
  // x = 0, 0.1 .. 1, shift 0.05 x^2, sigma = 0.1: delta b = 0.05, delta a = -0.0075 exactly; the
  // sigmas computed at 50 digits. Huterer & Takada (2005), Taylor et al. (2007).
  const auto points = range(11, 0.1);
  const auto line = whet::exact([&points](const auto& at) {
    return whet::tabulate(points, [&](double x) { return at["a"] + at["b"] * x; });
  });
  std::vector<double> curvature;
  for (const double x : points) curvature.push_back(0.05 * x * x);
  const Forecast forecast(expected_information(
      {{"a", 0.0}, {"b", 1.0}}, GaussianLikelihood(line, DiagonalCovariance::uniform(11, 0.1)),
      {.shifts = {{"curvature", curvature}}}));
  CHECK(forecast.bias("b", "curvature") == close_to(0.05, 1e-13));
  CHECK(forecast.bias("a", "curvature") == close_to(-0.0075, 1e-13));
  CHECK(forecast.sigma("a") == close_to(0.0564076074817766, 1e-14));
  CHECK(forecast.sigma("b") == close_to(0.0953462589245592, 1e-14));
}

TEST_CASE("A complex tone has the bounds of Rife & Boorstyn (1974)") {
  // A exp(i (omega n + phi)), n = 0..31, both quadratures with sigma = 0.2, A = 1.5.
  const auto tone = whet::exact([](const auto& at) {
    using std::cos, std::sin;
    return whet::tabulate(range(64, 0.5), [&](double k) {  // n and n + 1/2: its two quadratures
      const double n = std::floor(k);
      const auto phase = at["omega"] * n + at["phi"];
      return at["A"] * (k > n ? sin(phase) : cos(phase));
    });
  });
  const Forecast forecast(
      expected_information({{"A", 1.5}, {"omega", 0.6}, {"phi", 0.3}},
                           GaussianLikelihood(tone, DiagonalCovariance::uniform(64, 0.2))));
  CHECK(std::pow(forecast.sigma("A"), 2) == close_to(0.00125, 1e-14));
  CHECK(std::pow(forecast.sigma("omega"), 2) == close_to(6.51678071032910e-6, 1e-14));
  CHECK(std::pow(forecast.sigma("phi"), 2) == close_to(0.00212121212121212, 1e-14));
  CHECK(forecast.covariance("omega", "phi") == close_to(-1.01010101010101e-4, 1e-13));
  // In frequency, omega / 2 pi.
  const double pi = std::numbers::pi;
  const double f = forecast.derived_sigma(
      whet::exact([pi](const auto& at) { return at["omega"] / (2.0 * pi); }));
  CHECK(f * f == close_to(1.65071983777025e-7, 1e-13));
}

TEST_CASE("A real tone has the exact bounds, 7 per cent above those of many periods") {
  // A cos(omega n + phi), n = 0..31, sigma = 0.2: computed at 50 digits.
  const auto tone = whet::exact([](const auto& at) {
    using std::cos;
    return whet::tabulate(range(32, 1.0),
                          [&](double n) { return at["A"] * cos(at["omega"] * n + at["phi"]); });
  });
  const Information information =
      expected_information({{"A", 1.5}, {"omega", 0.6}, {"phi", 0.3}},
                           GaussianLikelihood(tone, DiagonalCovariance::uniform(32, 0.2)));
  const Forecast forecast(information);
  CHECK(std::pow(forecast.sigma("A"), 2) == close_to(0.00247422901495889, 1e-14));
  CHECK(std::pow(forecast.sigma("omega"), 2) == close_to(1.40814373331835e-5, 1e-14));
  CHECK(std::pow(forecast.sigma("phi"), 2) == close_to(0.00439291900167641, 1e-14));
  CHECK(information.matrix()(1, 1) == close_to(276139.800590822, 3e-15));
  CHECK(information.matrix()(1, 2) == close_to(13448.3615591121, 3e-15));
  CHECK(information.matrix()(0, 1) == close_to(400.195297630739, 1e-13));
}

TEST_CASE("A binomial proportion, and its logit, as one reading of mean n p") {
  // n = 40, p = 0.3: computed at 50 digits. Variance n p (1 - p).
  const auto noise = DiagonalCovariance::uniform(1, std::sqrt(40 * 0.3 * 0.7));
  const auto mean = whet::exact([](const auto& at) { return std::vector{40.0 * at["p"]}; });
  const Information information =
      expected_information({{"p", 0.3}}, GaussianLikelihood(mean, noise));
  CHECK(information.matrix()(0, 0) == close_to(190.476190476190, 3e-15));
  CHECK(Forecast(information).sigma("p") == close_to(0.0724568837309472, 3e-15));
  const Information logit = information.replacing(
      {"p"}, {{"logit", std::log(0.3 / 0.7)}}, whet::exact([](const auto& at) {
        using std::exp;
        return std::vector{1.0 / (1.0 + exp(-at["logit"]))};
      }));
  CHECK(logit.matrix()(0, 0) == close_to(8.4, 1e-14));
}

TEST_CASE("Logistic regression is one of independent Bernoulli readings") {
  // x = -2..5, beta = (-1, 0.5): computed at 50 digits. Variance p (1 - p) of each.
  std::vector<double> points, deviations;
  for (int x = -2; x <= 5; ++x) {
    points.push_back(x);
    const double p = 1.0 / (1.0 + std::exp(1.0 - 0.5 * x));
    deviations.push_back(std::sqrt(p * (1.0 - p)));
  }
  const auto probability = whet::exact([&points](const auto& at) {
    using std::exp;
    return whet::tabulate(points,
                          [&](double x) { return 1.0 / (1.0 + exp(-(at["b0"] + at["b1"] * x))); });
  });
  const Information information = expected_information(
      {{"b0", -1.0}, {"b1", 0.5}},
      GaussianLikelihood(probability, DiagonalCovariance::from_standard_deviations(deviations)));
  CHECK(information.matrix()(0, 0) == close_to(1.51651778043032, 3e-15));
  CHECK(information.matrix()(0, 1) == close_to(2.61306121924662, 3e-15));
  CHECK(information.matrix()(1, 1) == close_to(10.7936101493223, 1e-14));
  CHECK(Forecast(information).sigma("b0") == close_to(1.06364139094157, 5e-15));
  CHECK(Forecast(information).sigma("b1") == close_to(0.398690253252406, 5e-15));
}

TEST_CASE("Range and bearing fix a position as their geometry says") {
  // (3, 4), sigma_r = 0.1, sigma_theta = 0.05: computed at 50 digits.
  const auto seen = whet::exact([](const auto& at) {
    using std::atan2, std::sqrt;
    const auto x = at["x"], y = at["y"];
    return std::vector{sqrt(x * x + y * y), atan2(y, x)};
  });
  const Information information = expected_information(
      {{"x", 3.0}, {"y", 4.0}},
      GaussianLikelihood(seen, DiagonalCovariance::from_standard_deviations({0.1, 0.05})));
  CHECK(information.matrix()(0, 0) == close_to(46.24, 3e-15));
  CHECK(information.matrix()(0, 1) == close_to(40.32, 3e-15));
  CHECK(information.matrix()(1, 1) == close_to(69.76, 3e-15));
  const Forecast forecast(information);
  CHECK(forecast.sigma("x") == close_to(0.208806130178211, 3e-15));
  CHECK(forecast.sigma("y") == close_to(0.17, 3e-15));
  CHECK(forecast.correlation("x", "y") == close_to(-0.709918305516853, 5e-15));
  // sqrt(det C) = r sigma_r sigma_theta.
  CHECK(forecast.figure_of_merit("x", "y") == close_to(1.0 / (5.0 * 0.1 * 0.05), 1e-14));
}

TEST_CASE("The time of arrival of a Gaussian pulse has the bound of its bandwidth") {
  // A = 3, w = 0.25, N0 = 0.02, sampled at 0.05 with sigma^2 = N0 / (2 * 0.05): Woodward (1953) and
  // Van Trees (1968), from memory; value computed at 50 digits.
  std::vector<double> times;
  for (int i = -60; i <= 60; ++i) times.push_back(0.05 * i);
  const auto pulse = whet::exact([&times](const auto& at) {
    using std::exp;
    return whet::tabulate(times, [&](double t) {
      const auto late = (t - at["arrival"]) / 0.25;
      return 3.0 * exp(-0.5 * late * late);
    });
  });
  const Forecast forecast(expected_information(
      {{"arrival", 0.0}},
      GaussianLikelihood(pulse, DiagonalCovariance::uniform(121, std::sqrt(0.2)))));
  CHECK(forecast.sigma("arrival") == close_to(0.0177041988671199, 3e-14));
}

TEST_CASE("A covariance of another size than the data is refused with both") {
  const auto two = whet::exact([](const auto& at) { return std::vector{at["a"], at["a"]}; });
  CHECK_THROWS_WITH_AS(
      (void)expected_information({{"a", 1.0}},
                                 GaussianLikelihood(two, DiagonalCovariance::uniform(3, 1.0))),
      doctest::Contains("size of the covariance: got 3, expected 2"), CovarianceError);
}

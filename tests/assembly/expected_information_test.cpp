#include <whet/assembly/expected_information.hpp>

#include <algorithm>
#include <cmath>
#include <string>
#include <vector>

#include <doctest/doctest.h>

#include <whet/covariances/dense_covariance.hpp>
#include <whet/covariances/diagonal_covariance.hpp>
#include <whet/forecasts/forecast.hpp>
#include <whet/likelihoods/gaussian_likelihood.hpp>
#include <whet/likelihoods/poisson_likelihood.hpp>
#include <whet/observables/concatenate.hpp>
#include <whet/observables/exact.hpp>
#include <whet/observables/tabulate.hpp>

#include <information/random_problems.hpp>
#include <support/close_to.hpp>

using whet::CovarianceError;
using whet::DerivativeError;
using whet::Derivatives;
using whet::DiagonalCovariance;
using whet::expected_derivatives;
using whet::expected_information;
using whet::Forecast;
using whet::GaussianLikelihood;
using whet::GaussianPrior;
using whet::Information;
using whet::ObservableError;
using whet::ParameterError;
using whet::Parameters;
using whet::test::close_to;
using whet::test::Draws;
using whet::test::named;
using whet::test::true_sigmas;

namespace {

/// A decay over a background, generic in the scalar.
const auto model = [](const auto& at) {
  using std::exp;
  std::vector<double> times;
  for (int i = 0; i < 25; ++i) times.push_back(0.2 * i);
  return whet::tabulate(
      times, [&](double t) { return at["amplitude"] * exp(-at["rate"] * t) + at["background"]; });
};
/// Calls counted.
struct Code {
  static inline int calls = 0;
  std::vector<double> operator()(const whet::Point<double>& at) const {
    ++calls;
    return model(at);
  }
};
const Parameters parameters{{"amplitude", 2.0}, {"rate", 0.7}, {"background", 0.3}};
const DiagonalCovariance noise = DiagonalCovariance::uniform(25, 0.05);
const GaussianLikelihood likelihood(Code{}, noise);

}  // namespace

TEST_CASE("Steps give what exact derivatives give, to the error that is stated") {
  const Forecast exact(
      expected_information(parameters, GaussianLikelihood(whet::exact(model), noise)));
  for (const double accuracy : {1e-2, 1e-3, 1e-6}) {
    Code::calls = 0;
    const Forecast steps(expected_information(parameters, likelihood, {.accuracy = accuracy}));
    for (const auto& p : parameters) {
      CHECK(std::abs(steps.sigma(p.name) - exact.sigma(p.name)) <=
            steps.numerical_error(p.name) + exact.numerical_error(p.name));
      CHECK(steps.numerical_error(p.name) <= accuracy * steps.sigma(p.name));
    }
    CHECK(steps.notes().empty());
    CHECK(Code::calls <= 40);
  }
}

TEST_CASE("Beside information that is given, fewer calls are spent") {
  Code::calls = 0;
  (void)expected_information(parameters, likelihood, {.accuracy = 1e-6});
  const int alone = Code::calls;
  Code::calls = 0;
  const Information sharp = expected_information(
      parameters, GaussianLikelihood(whet::exact(model), DiagonalCovariance::uniform(25, 1e-4)));
  (void)expected_information(parameters, likelihood, {.accuracy = 1e-6, .given = sharp});
  CHECK(Code::calls < alone);
  CHECK(Code::calls >= 7);
}

TEST_CASE("Given information with large errors of its own does not keep the rounds going") {
  // Printed to two digits: no accuracy of 1e-3 is to be had, and the budget is not spent on it.
  const Information coarse =
      Information::from_matrix(parameters, 1e4 * Eigen::MatrixXd::Identity(3, 3), {.digits = 2});
  Code::calls = 0;
  const Information information = expected_information(parameters, likelihood, {.given = coarse});
  CHECK(Code::calls <= 40);
  // What is given is no part of the result.
  const Forecast alone(expected_information(parameters, likelihood));
  CHECK(Forecast(information).sigma("rate") == close_to(alone.sigma("rate"), 1e-2));
}

TEST_CASE("What is given can be one thing or a list") {
  const Information probe = Information::from_matrix({{"rate", 0.7}}, Eigen::MatrixXd{{100.0}});
  const GaussianPrior prior("background", 0.1);
  CHECK_NOTHROW((void)expected_information(parameters, likelihood, {.given = probe}));
  CHECK_NOTHROW((void)expected_information(parameters, likelihood, {.given = prior}));
  CHECK_NOTHROW((void)expected_information(parameters, likelihood, {.given = {probe, prior}}));
}

TEST_CASE("Derivatives are bought once and serve any noise, in any order of the parameters") {
  const Derivatives derivatives = expected_derivatives(parameters, likelihood);
  Code::calls = 0;
  const Parameters other{{"background", 0.3}, {"amplitude", 2.0}, {"rate", 0.7}};
  const auto quieter = DiagonalCovariance::uniform(25, 0.025);
  const Forecast first(expected_information(parameters, GaussianLikelihood(derivatives, noise))),
      second(expected_information(other, GaussianLikelihood(derivatives, quieter)));
  CHECK(Code::calls == 0);
  for (const auto& p : parameters) {
    CHECK(second.sigma(p.name) == close_to(0.5 * first.sigma(p.name), 1e-12));
    CHECK(second.numerical_error(p.name) == close_to(0.5 * first.numerical_error(p.name), 1e-9));
  }
}

TEST_CASE("A kink is refused by the name of its parameter, in whatever order they are asked for") {
  // "rate" has a kink that matters, "amplitude" is sharp.
  Derivatives::Parts parts{.parameters = {{"amplitude", 1.0}, {"rate", 1.0}},
                           .mean = Eigen::VectorXd::Zero(2),
                           .values = Eigen::MatrixXd::Identity(2, 2),
                           .truncation = Eigen::MatrixXd{{0.0, 0.0}, {0.0, 0.3}}};
  parts.reports.resize(2);
  parts.reports[1].status = whet::DerivativeStatus::kink;
  parts.reports[1].elements = {1};
  const auto unit = DiagonalCovariance::uniform(2, 1.0);
  const Parameters there{{"amplitude", 1.0}, {"rate", 1.0}},
      back{{"rate", 1.0}, {"amplitude", 1.0}};
  for (const Parameters& order : {there, back}) {
    CHECK_THROWS_WITH_AS(
        (void)expected_information(order, GaussianLikelihood(Derivatives(parts), unit)),
        doctest::Contains("parameter \"rate\", element 1: got a kink or jump"), DerivativeError);
  }
  // One that does not matter is let pass.
  const auto quiet = expected_information(back, GaussianLikelihood(Derivatives(parts), unit),
                                          {.given = GaussianPrior("rate", 1e-3)});
  CHECK(quiet.parameters().size() == 2);
}

TEST_CASE("Independent noise of the derivatives moves no sigma further than stated") {
  // Its square adds to F however little of it points along the rows: with n elements, sqrt(n) times
  // what one direction sees.
  Draws draws(1);
  int off = 0, all = 0;
  double widest = 0.0;
  for (const Eigen::Index n : {30, 400, 4000, 400000}) {
    for (int trial = 0; trial < (n < 10000 ? 30 : 4); ++trial) {
      Eigen::MatrixXd exact = draws.normal(n, 3);
      exact.col(1) = exact.col(0) + draws.decades(-2.0, 0.0) * exact.col(1);
      const double size = (n < 10000 ? draws.decades(-4.0, -1.5) : 0.03) /
                          true_sigmas(exact).maxCoeff() / std::sqrt(static_cast<double>(n));
      Derivatives::Parts parts{.parameters = named(3),
                               .mean = Eigen::VectorXd::Zero(n),
                               .values = exact + size * draws.normal(n, 3),
                               .noise = Eigen::MatrixXd::Constant(n, 3, 4.5 * size)};
      parts.reports.resize(3);
      for (auto& report : parts.reports) report.independent_noise = true;
      const auto unit = DiagonalCovariance::uniform(n, 1.0);
      const Forecast forecast(
          expected_information(named(3), GaussianLikelihood(Derivatives(parts), unit)));
      const Eigen::VectorXd truth = true_sigmas(exact);
      for (Eigen::Index p = 0; p < 3; ++p) {
        const std::string name = "p" + std::to_string(p);
        REQUIRE(std::isfinite(forecast.sigma(name)));
        ++all;
        if (std::abs(forecast.sigma(name) - truth(p)) > forecast.numerical_error(name)) ++off;
        widest = std::max(widest, forecast.numerical_error(name) / truth(p));
      }
    }
  }
  MESSAGE("further off than stated: ", off, " of ", all, "; widest claim ", widest);
  CHECK(off == 0);
}

TEST_CASE("Independent data in one vector hold the sum of their informations") {
  const auto late = whet::exact([](const auto& at) {
    return whet::tabulate(std::vector<double>{5.0, 6.0, 7.5},
                          [&](double t) { return at["background"] + 0.01 * t * at["rate"]; });
  });
  const auto early = whet::exact(model);
  const Eigen::VectorXd first = Eigen::VectorXd::Constant(25, 0.05),
                        second = Eigen::VectorXd::Constant(3, 0.02);
  Eigen::VectorXd both(28);
  both << first, second;
  const auto of = [&](const auto& observable, const Eigen::VectorXd& deviations) {
    return expected_information(
        parameters,
        GaussianLikelihood(observable, DiagonalCovariance::from_standard_deviations(deviations)));
  };
  const Eigen::MatrixXd sum = (of(early, first) + of(late, second)).matrix();
  const Eigen::MatrixXd whole = of(whet::concatenate(early, late), both).matrix();
  CHECK((whole - sum).norm() <= 1e-14 * sum.norm());
}

TEST_CASE("Parameters that only rounding tells apart are not measured, the others are") {
  const auto twins = [](const whet::Point<double>& at) {
    std::vector<double> out;
    for (int i = 0; i < 20; ++i) {
      const double x = 0.1 * i;
      out.push_back(std::exp((at["a"] + at["b"]) * x) + at["c"] * x * x);
    }
    return out;
  };
  const Forecast forecast(
      expected_information({{"a", 0.3}, {"b", 0.4}, {"c", 1.0}},
                           GaussianLikelihood(twins, DiagonalCovariance::uniform(20, 0.1))));
  CHECK(std::isinf(forecast.sigma("a")));
  CHECK(std::isinf(forecast.sigma("b")));
  CHECK(std::isfinite(forecast.sigma("c")));
  CHECK(forecast.numerical_error("c") <= 1e-2 * forecast.sigma("c"));
}

TEST_CASE("A shift of the data is a bias of the parameters, with numerical derivatives too") {
  // Along the column of the background, the data are shifted by 0.1: so is the background.
  const Forecast forecast(expected_information(
      parameters, likelihood, {.shifts = {{"level", std::vector<double>(25, 0.1)}}}));
  CHECK(forecast.bias("background", "level") == close_to(0.1, 1e-6));
  CHECK(std::abs(forecast.bias("rate", "level")) <= 1e-6 * forecast.sigma("rate"));
}

TEST_CASE("Wrong input is refused before the observable is called") {
  const auto refused = [](const auto& call, const char* words) {
    Code::calls = 0;
    CHECK_THROWS_WITH_AS((void)call(), doctest::Contains(words), ParameterError);
    CHECK(Code::calls == 0);
  };
  refused([] { return expected_information(Parameters{}, likelihood); },
          "number of parameters: got 0, expected at least one");
  for (const double accuracy : {0.0, -1.0, std::nan("")}) {
    refused([&] { return expected_information(parameters, likelihood, {.accuracy = accuracy}); },
            "expected an accuracy > 0");
  }
  refused(
      [] { return expected_information(parameters, likelihood, {.evaluations_per_parameter = 1}); },
      "evaluations_per_parameter 1");
  refused(
      [] {
        return expected_information(parameters, likelihood, {.given = GaussianPrior("x", 1.0)});
      },
      "joining a prior: parameter \"x\"");
  const Information moved = Information::from_matrix({{"rate", 0.8}}, Eigen::MatrixXd{{1.0}});
  refused([&] { return expected_information(parameters, likelihood, {.given = moved}); },
          "fiducial value of parameter \"rate\"");
  const Information plover =
      Information::from_matrix({{"rate", 0.7}}, Eigen::MatrixXd{{1.0}}, {.name = "Plover"});
  refused(
      [&] {
        return expected_information(parameters, likelihood, {.given = plover, .name = "Plover"});
      },
      "experiment \"Plover\" would count twice");
  refused(
      [] {
        return expected_information(
            parameters, likelihood,
            {.shifts = {{"s", std::vector<double>(25, 0.1)}, {"s", std::vector<double>(25, 0.2)}}});
      },
      "shift \"s\" is given twice");
}

TEST_CASE("Data, noise and shifts that do not fit are refused with their sizes") {
  CHECK_THROWS_WITH_AS(
      (void)expected_information(parameters,
                                 GaussianLikelihood(Code{}, DiagonalCovariance::uniform(3, 1.0))),
      doctest::Contains("size of the covariance: got 3, expected 25"), CovarianceError);
  for (const std::vector<double>& data :
       {std::vector<double>(24, 0.1), std::vector<double>(25, NAN)}) {
    CHECK_THROWS_WITH_AS(
        (void)expected_information(parameters, likelihood, {.shifts = {{"leak", data}}}),
        doctest::Contains("shift \"leak\": got "), ObservableError);
  }
  const auto nothing = [](const whet::Point<double>&) { return std::vector<double>{}; };
  CHECK_THROWS_WITH_AS((void)expected_information(parameters, GaussianLikelihood(nothing, noise)),
                       doctest::Contains("length of the data vector"), ObservableError);
}

TEST_CASE("Derivatives by other parameters, or at other fiducial values, are refused") {
  const Derivatives derivatives({{"x", 1.0}, {"y", 2.0}}, Eigen::VectorXd::Zero(2),
                                Eigen::MatrixXd::Identity(2, 2));
  const GaussianLikelihood given(derivatives, DiagonalCovariance::uniform(2, 1.0));
  const auto refused = [&](const Parameters& other, const char* words) {
    CHECK_THROWS_WITH_AS((void)expected_information(other, given), doctest::Contains(words),
                         ParameterError);
  };
  refused({{"x", 1.0}}, "parameters of the derivatives: got x, y, expected x");
  refused({{"x", 1.0}, {"z", 2.0}}, "\"z\"");
  refused({{"x", 1.0}, {"y", 2.5}},
          "expected_information: fiducial value of parameter \"y\": got 2.5 and 2");
}

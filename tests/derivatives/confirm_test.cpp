#include <whet/derivatives/confirm.hpp>

#include <algorithm>
#include <cmath>
#include <random>
#include <stdexcept>
#include <string>
#include <vector>

#include <doctest/doctest.h>

#include <whet/derivatives/exact_derivatives.hpp>
#include <whet/observables/labelled.hpp>

using whet::confirmed;
using whet::DerivativeError;
using whet::Derivatives;
using whet::exact;
using whet::Parameter;
using whet::Parameters;
using whet::Point;
using whet::detail::exact_derivatives;

namespace {

/// One parameter x, one element f(x), f generic in its scalar.
template <class F>
auto scalar(const F& f) {
  return exact([f](const auto& at) { return std::vector{f(at["x"])}; });
}

template <class F>
Derivatives confirmed_scalar(const Parameter& x, const F& f) {
  const auto observable = scalar(f);
  return confirmed(exact_derivatives(Parameters{x}, observable), observable);
}

/// Derivatives of f at x with a value of our own.
template <class F>
Derivatives claimed(const Parameter& x, const F& f, double value, double error = 0.0) {
  return Derivatives(Parameters{x}, Eigen::VectorXd::Constant(1, f(x.fiducial)),
                     Eigen::MatrixXd::Constant(1, 1, value),
                     Eigen::MatrixXd::Constant(1, 1, error));
}

template <class F>
void refused(const Parameter& x, const F& f, double value) {
  CHECK_THROWS_WITH_AS((void)confirmed(claimed(x, f, value), scalar(f)),
                       doctest::Contains("parameter \"x\", derivative of element 0: got "),
                       DerivativeError);
}

}  // namespace

TEST_CASE("Smooth functions are confirmed in one call and one pair a parameter") {
  const auto observable = exact([](const auto& at) {
    using std::cos, std::exp, std::log1p;
    const auto a = at["large"] / 1e12, b = at["small"] / 1e-12;
    return std::vector{exp(a) * cos(b + 0.5), a * a * a, log1p(a) + b * b, 0.0 * a + 7.0};
  });
  const Parameters parameters{{.name = "large", .fiducial = 3e12},
                              {.name = "small", .fiducial = 0.0, .scale = 1e-12},
                              {.name = "idle", .fiducial = 1.0}};
  const auto given = exact_derivatives(parameters, observable);
  const auto kept = confirmed(given, observable);
  CHECK(kept.evaluations() == given.evaluations() + 7);
  CHECK(kept.reports().at(0).evaluations == 2);
  CHECK(kept.values() == given.values());
  for (const auto& report : kept.reports()) CHECK(report.note.empty());
}

TEST_CASE("Hard but smooth functions are confirmed") {
  using std::cos, std::exp, std::log, std::sin, std::sqrt, std::tanh;
  const auto x = [](double fiducial) { return Parameter{.name = "x", .fiducial = fiducial}; };
  (void)confirmed_scalar(x(0.8), [](const auto& t) { return cos(130.0 * t); });
  (void)confirmed_scalar(x(0.8), [](const auto& t) { return cos(1300.0 * t); });
  (void)confirmed_scalar(x(2.0), [](const auto& t) { return 1.0 / (2.003 - t); });
  (void)confirmed_scalar(x(4.0), [](const auto& t) { return 5e5 + 0.01 * log(t); });
  (void)confirmed_scalar(x(1e-4), [](const auto& t) { return sqrt(t); });
  (void)confirmed_scalar(x(0.0), [](const auto& t) { return 3.0 + tanh(t / 2e-8); });
  (void)confirmed_scalar(x(1e-12), [](const auto& t) { return 1e-12 * exp(1e12 * t); });
  (void)confirmed_scalar(x(1e12), [](const auto& t) { return 1e12 * exp(1e-12 * t); });
  (void)confirmed_scalar(x(1.0), [](const auto& t) { return (5e9 + t * t) - 5e9; });  // cancels
  // Even, and as flat as x^3, at a fiducial of zero.
  const Parameter zero{.name = "x", .fiducial = 0.0, .scale = 1.0};
  (void)confirmed_scalar(zero, [](const auto& t) { return t * t; });
  (void)confirmed_scalar(zero, [](const auto& t) { return t * t * t; });
  (void)confirmed_scalar(zero, [](const auto& t) { return t - sin(t); });
}

TEST_CASE("Random sums of waves are confirmed, and one derivative in a hundred off is not") {
  std::mt19937_64 generator(20240601);
  std::uniform_real_distribution<double> uniform(-1.0, 1.0);
  int confirmations = 0, refusals = 0;
  const int trials = 300;
  for (int trial = 0; trial < trials; ++trial) {
    std::vector<double> c;
    for (int i = 0; i < 9; ++i) c.push_back(uniform(generator));
    const auto waves = [c](const auto& t) {
      using std::exp, std::sin;
      return c[0] * sin(30.0 * c[1] * t + c[2]) + c[3] * exp(3.0 * c[4] * t) + 0.0 * t + c[5];
    };
    const double at = std::pow(10.0, c[6]);
    const Parameter x{.name = "x", .fiducial = c[7] < 0.0 ? -at : at};
    const auto given = exact_derivatives(Parameters{x}, scalar(waves));
    try {
      (void)confirmed(given, scalar(waves));
      ++confirmations;
    } catch (const DerivativeError&) {
    }
    try {
      (void)confirmed(claimed(x, waves, 1.01 * given.values()(0, 0)), scalar(waves));
    } catch (const DerivativeError&) {
      ++refusals;
    }
  }
  CHECK(confirmations == trials);
  CHECK(refusals >= trials - 3);  // a derivative near zero hides a hundredth of it
}

TEST_CASE("A wrong sign, factor or unit is refused") {
  const auto f = [](const auto& t) {
    using std::exp;
    return t * t * exp(-t / 3.0);
  };
  const Parameter x{.name = "x", .fiducial = 1.7};
  const double right = 1.3825979729686992;  // (2 x - x^2/3) exp(-x/3)
  CHECK_NOTHROW((void)confirmed(claimed(x, f, right), scalar(f)));
  for (const double factor : {-1.0, 1.01, 0.99, 2.0, 1000.0, 0.0}) refused(x, f, factor * right);
}

TEST_CASE("A wrong factor is refused beside rounding that would hide it over a shorter step") {
  const auto f = [](const auto& t) {
    using std::log;
    return 5e5 + 0.01 * log(t);
  };
  refused({.name = "x", .fiducial = 4.0}, f, 1.01 * 0.0025);
}

TEST_CASE("A kink or jump at the fiducial value is refused, whichever branch was taken") {
  using std::abs, std::max, std::sqrt;
  const Parameter zero{.name = "x", .fiducial = 0.0, .scale = 2.0};
  const auto kink = [](const auto& t) { return abs(t); };
  for (const double branch : {-1.0, 0.0, 1.0}) refused(zero, kink, branch);
  CHECK_THROWS_AS((void)confirmed_scalar(zero, kink), DerivativeError);
  CHECK_THROWS_AS((void)confirmed_scalar(zero, [](const auto& t) { return sqrt(t * t); }),
                  DerivativeError);

  const Parameter two{.name = "x", .fiducial = 2.0};
  const auto tie = [](const auto& t) { return max(t, 4.0 / t); };
  for (const double branch : {-1.0, 0.0, 1.0}) refused(two, tie, branch);
  CHECK_THROWS_AS((void)confirmed_scalar(two, tie), DerivativeError);
  CHECK_THROWS_AS((void)confirmed_scalar(two, [](const auto& t) { return abs(t - 2.0) + t; }),
                  DerivativeError);
  CHECK_THROWS_AS((void)confirmed_scalar(two, [](const auto& t) { return t < 2.0 ? t : t + 0.01; }),
                  DerivativeError);
}

TEST_CASE("Bounds are never crossed, on either side or both") {
  double lowest = 1e300, highest = -1e300;
  const auto f = [&](const auto& t) {
    using std::log1p;
    if constexpr (std::is_same_v<std::decay_t<decltype(t)>, double>) {
      lowest = std::min(lowest, t), highest = std::max(highest, t);
    }
    return log1p(3.0 * t);
  };
  for (const Parameter& x :
       {Parameter{.name = "x", .fiducial = 0.0, .lower = 0.0, .scale = 1.0},
        Parameter{.name = "x", .fiducial = 2.0, .upper = 2.0},
        Parameter{.name = "x", .fiducial = 2.0, .upper = 2.00015},
        Parameter{.name = "x", .fiducial = 2.0, .lower = 1.99999, .upper = 2.00002},
        Parameter{.name = "x", .fiducial = 0.0, .lower = 0.0, .upper = 1e-9}}) {
    lowest = 1e300, highest = -1e300;
    CHECK_NOTHROW((void)confirmed_scalar(x, f));
    CHECK(lowest >= x.lower);
    CHECK(highest <= x.upper);
    CHECK(lowest < highest);
    refused(x, f, 1.01 * 3.0 / (1.0 + 3.0 * x.fiducial));
  }
}

TEST_CASE("A bound that cannot be met exactly in rounding is not crossed") {
  double highest = -1e300;
  const auto line = [&](const auto& t) {
    if constexpr (std::is_same_v<std::decay_t<decltype(t)>, double>) highest = std::max(highest, t);
    return 3.0 * t;
  };
  // x + (1 - x) is 2 in double.
  (void)confirmed_scalar(
      {.name = "x", .fiducial = -1e16 - 2.0, .lower = -1e16 - 2.0, .upper = 1.0, .scale = 1e30},
      line);
  CHECK(highest <= 1.0);
}

TEST_CASE("A step that the bounds keep from growing acquits nothing") {
  const auto flat = [](const auto& t) { return 0.0 * t + 3.0; };
  refused({.name = "x", .fiducial = 2.0, .lower = 1.99999, .upper = 2.00002}, flat, 1.0);
}

TEST_CASE("A kink close to a bound is refused where half a step fits") {
  const auto kink = [](const auto& t) {
    using std::abs;
    return abs(t - 2.0) + t;
  };
  for (const double branch : {0.0, 1.0, 2.0}) {
    refused({.name = "x", .fiducial = 2.0, .upper = 2.00015}, kink, branch);
    refused({.name = "x", .fiducial = 2.0, .lower = 1.99985}, kink, branch);
  }
}

TEST_CASE("The error given with a derivative is allowed for") {
  const auto f = [](const auto& t) { return 3.0 * t; };
  const Parameter x{.name = "x", .fiducial = 1.0};
  CHECK_NOTHROW((void)confirmed(claimed(x, f, 3.05, 0.06), scalar(f)));
  CHECK_THROWS_AS((void)confirmed(claimed(x, f, 3.05, 0.01), scalar(f)), DerivativeError);
}

TEST_CASE("Noise of a hundred-millionth of the derivative over a scale is no disagreement") {
  std::mt19937_64 generator(7);
  std::normal_distribution<double> noise(0.0, 1e-8);
  const auto power = [](int i) { return 1.0 + 0.02 * i; };
  const auto noisy = [&](const Point<double>& at) {
    std::vector<double> data;
    for (int i = 0; i < 100; ++i) {
      data.push_back(std::pow(at["x"], power(i)) * (1.0 + noise(generator)));
    }
    return data;
  };
  const Parameters parameters{{.name = "x", .fiducial = 1.5}};
  Eigen::VectorXd mean(100);
  Eigen::MatrixXd slope(100, 1);
  for (int i = 0; i < 100; ++i) {
    mean(i) = std::pow(1.5, power(i));
    slope(i, 0) = power(i) * std::pow(1.5, power(i) - 1.0);
  }
  CHECK_NOTHROW((void)confirmed(Derivatives(parameters, mean, slope), noisy));
}

TEST_CASE("The message names both values, the tolerance and the label of the element") {
  const auto f = whet::labelled(
      [](const auto& at) {
        return std::vector{at["x"], at["x"] * at["x"]};
      },
      {"line", "l = 40"});
  const Parameters parameters{{.name = "x", .fiducial = 1.0}};
  const auto right = exact_derivatives(parameters, exact(f));
  auto parts = right.parts();
  parts.values(1, 0) = -2.0;
  CHECK_THROWS_WITH_AS(
      (void)confirmed(Derivatives(parts), f),
      "confirmed: parameter \"x\", derivative of element 1 (l = 40): got -2, expected 2 within "
      "0.002 by differences at a step of 0.0001. Either the derivative is wrong, or the observable "
      "has a kink, jump or noise there.",
      DerivativeError);
}

TEST_CASE("A mean of another model is refused by element") {
  const auto f = [](const auto& t) { return 3.0 * t; };
  const Parameters parameters{{.name = "x", .fiducial = 1.0}};
  const Derivatives given(parameters, Eigen::VectorXd::Constant(1, 3.1),
                          Eigen::MatrixXd::Constant(1, 1, 3.0));
  CHECK_THROWS_WITH_AS((void)confirmed(given, scalar(f)),
                       doctest::Contains("mean, element 0: got 3.1, expected 3, as"),
                       DerivativeError);
}

TEST_CASE("A failed call and another length are refused with the point") {
  const Parameter x{.name = "x", .fiducial = 1.0};
  const auto f = [](const auto& t) { return 3.0 * t; };
  const auto failing = [](const Point<double>& at) -> std::vector<double> {
    if (at["x"] < 1.0) throw std::runtime_error("out of table");
    return {3.0 * at["x"]};
  };
  CHECK_THROWS_WITH_AS((void)confirmed(claimed(x, f, 3.0), failing),
                       doctest::Contains("failed at \"x\" = 0.99995: got out of table"),
                       whet::ObservableError);
  const auto growing = [](const Point<double>& at) {
    return std::vector<double>(at["x"] > 1.0 ? 2 : 1, 3.0 * at["x"]);
  };
  CHECK_THROWS_WITH_AS((void)confirmed(claimed(x, f, 3.0), growing),
                       doctest::Contains("got 2, expected 1"), whet::ObservableError);
}

TEST_CASE("Where nothing says how far to step, a scale is asked for") {
  const Parameter zero{.name = "x", .fiducial = 0.0};
  const auto f = [](const auto& t) { return 3.0 * t; };
  CHECK_THROWS_WITH_AS((void)confirmed(claimed(zero, f, 3.0), scalar(f)),
                       doctest::Contains("parameter \"x\": got a fiducial value of 0 and no scale"),
                       whet::ParameterError);
}

TEST_CASE("A column that rounding hides is reported as not confirmed") {
  const auto f = [](const auto& t) { return 1e15 + t; };
  const auto kept = confirmed_scalar({.name = "x", .fiducial = 1.0}, f);
  CHECK(kept.reports().at(0).note.find("not confirmed") != std::string::npos);
}

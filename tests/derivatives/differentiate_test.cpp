#include <whet/derivatives/differentiate.hpp>

#include <cmath>
#include <random>
#include <stdexcept>
#include <string>
#include <vector>

#include <doctest/doctest.h>

#include <derivatives/random_functions.hpp>
#include <support/close_to.hpp>

using whet::Derivatives;
using whet::DerivativeStatus;
using whet::differentiate;
using whet::Parameter;
using whet::Parameters;
using whet::Point;
using whet::test::close_to;
using whet::test::hash_noise;
using whet::test::printed;

namespace {

/// The derivative of a function of one parameter x, accuracy 1e-6.
template <class F>
Derivatives derivative_of(Parameter parameter, F f, double accuracy = 1e-6) {
  parameter.name = "x";
  return differentiate(Parameters{parameter},
                       [f](const Point<double>& at) { return std::vector<double>{f(at["x"])}; },
                       {.accuracy = accuracy});
}

bool honest(const Derivatives& d, double exact) {
  return std::abs(d.values()(0, 0) - exact) <= d.errors()(0, 0);
}

bool kinked(const Derivatives& d) { return d.reports()[0].status == DerivativeStatus::kink; }

}  // namespace

TEST_CASE("Smooth functions come out to eleven digits in twelve calls") {
  const auto a =
      derivative_of({.fiducial = 1.7}, [](double x) { return x * x * std::exp(-x / 3); });
  CHECK(a.values()(0, 0) == close_to(1.3825979729686992, 1e-11));
  CHECK(a.evaluations() <= 12);
  const auto b = derivative_of({.fiducial = 2.2}, [](double x) { return std::sin(x) / (1 + x); });
  CHECK(b.values()(0, 0) == close_to(-0.26286132607780238, 1e-11));
  CHECK(b.evaluations() <= 12);
}

TEST_CASE("An oscillation finer than the first step is found without a kink") {
  const auto d = derivative_of({.fiducial = 0.8}, [](double x) { return std::cos(130 * x); });
  CHECK(d.values()(0, 0) == close_to(41.810912411129735, 1e-9));
  CHECK(d.evaluations() <= 25);
  CHECK(!kinked(d));
}

TEST_CASE("A pole nearer than the first step is seen") {
  const auto d = derivative_of({.fiducial = 2.0}, [](double x) { return 1 / (2.003 - x); });
  CHECK(d.values()(0, 0) == close_to(111111.11111110268, 1e-9));
  CHECK(d.evaluations() <= 25);
  CHECK(honest(d, 111111.11111110268));
}

TEST_CASE("At a bound the derivative is one-sided, and nothing beyond is called") {
  const auto above = derivative_of({.fiducial = 0.0, .lower = 0.0, .scale = 1.0}, [](double x) {
    if (x < 0.0) throw std::domain_error("outside");
    return std::log(1 + 3 * x);
  });
  CHECK(above.values()(0, 0) == close_to(3.0, 1e-7));
  CHECK(above.evaluations() <= 12);
  CHECK(above.reports()[0].note == "one-sided, from above");
  const auto below = derivative_of({.fiducial = 0.0, .upper = 0.0, .scale = 1.0}, [](double x) {
    if (x > 0.0) throw std::domain_error("outside");
    return std::exp(0.7 * x);
  });
  CHECK(below.values()(0, 0) == close_to(0.7, 1e-9));
  CHECK(below.reports()[0].note == "one-sided, from below");
}

TEST_CASE("Rounded output is seen, and limits what is claimed") {
  const auto d =
      derivative_of({.fiducial = 1.9}, [](double x) { return printed(std::pow(x, 1.5), 6); });
  CHECK(d.reports()[0].status == DerivativeStatus::rounded);
  CHECK(d.values()(0, 0) == close_to(2.0676073128135330, std::pow(10.0, -3.5)));
  CHECK(honest(d, 2.0676073128135330));
}

TEST_CASE("Noise is seen, and limits what is claimed") {
  const auto d = derivative_of({.fiducial = 0.9},
                               [](double x) { return std::atan(x) * (1 + 1e-5 * hash_noise(x)); });
  CHECK(d.reports()[0].status == DerivativeStatus::noise_limited);
  CHECK(std::abs(d.values()(0, 0) - 0.55248618784530390) <= 3e-4);
  CHECK(honest(d, 0.55248618784530390));
}

TEST_CASE("A large offset costs digits, not honesty") {
  const auto d =
      derivative_of({.fiducial = 4.0}, [](double x) { return 5e5 + 0.01 * std::log(x); });
  CHECK(d.values()(0, 0) == close_to(0.0025, 1e-6));
  CHECK(honest(d, 0.0025));
  CHECK(!kinked(d));
}

TEST_CASE("A kink or a jump at the fiducial value is reported with a claim as wide") {
  const auto kink = derivative_of({.fiducial = 2.0}, [](double x) { return std::abs(x - 2) + x; });
  CHECK(kinked(kink));
  CHECK(kink.reports()[0].elements == std::vector<Eigen::Index>{0});
  CHECK(kink.errors()(0, 0) >= 1.0);
  CHECK(kinked(derivative_of({.fiducial = 1.0}, [](double x) { return x >= 1 ? 1.0 : 0.0; })));
  CHECK(kinked(derivative_of({.fiducial = 2.0},
                             [](double x) { return std::max(std::exp(x), std::exp(4 - x)); })));
}

TEST_CASE("Where calls fail is a bound") {
  const auto root = derivative_of({.fiducial = 1e-4}, [](double x) { return std::sqrt(x); });
  CHECK(root.values()(0, 0) == close_to(50.0, 1e-9));
  // NaN from just below on, an exception from just above on, and both.
  const auto f = [](double x) { return std::sin(x); };
  const auto above =
      derivative_of({.fiducial = 1.0}, [&](double x) { return x < 1 ? std::nan("") : f(x); });
  CHECK(above.values()(0, 0) == close_to(std::cos(1.0), 1e-6));
  CHECK(above.reports()[0].note == "one-sided, from above; some calls failed: element 0 is nan");
  const auto narrow = derivative_of({.fiducial = 1.0}, [&](double x) {
    if (std::abs(x - 1) > 1e-3) throw std::runtime_error("no convergence");
    return f(x);
  });
  CHECK(narrow.values()(0, 0) == close_to(std::cos(1.0), 1e-6));
  CHECK(honest(narrow, std::cos(1.0)));
}

TEST_CASE("A fiducial value of zero without a scale is probed") {
  const auto d = derivative_of({.fiducial = 0.0}, [](double x) { return std::tanh(x / 2e-8); });
  CHECK(d.values()(0, 0) == close_to(5e7, 1e-8));
  CHECK(d.evaluations() <= 15);
}

TEST_CASE("Digits near those of double precision are claimed where they are there") {
  const auto d = derivative_of(
      {.fiducial = 0.7}, [](double x) { return std::exp(x); }, 1e-8);
  CHECK(d.errors()(0, 0) <= 1e-8 * std::exp(0.7));
  CHECK(d.evaluations() <= 9);
  CHECK(honest(d, std::exp(0.7)));
}

TEST_CASE("Scales that differ by twenty-four orders of magnitude are met to 1e-8 in forty calls") {
  const Parameters parameters{{.name = "large", .fiducial = 3.0e12},
                              {.name = "small", .fiducial = 0.0, .scale = 1e-12},
                              {.name = "idle", .fiducial = 1.0}};
  const auto observable = [](const Point<double>& at) {
    const double a = at["large"] / 1e12, b = at["small"] / 1e-12;
    return std::vector<double>{std::exp(a) * std::cos(b + 0.5), a * a * a, std::log1p(a) + b * b,
                               7.0};
  };
  const Derivatives d = differentiate(parameters, observable, {.accuracy = 1e-8});
  Eigen::MatrixXd exact = Eigen::MatrixXd::Zero(4, 3);
  exact.col(0) << std::exp(3.0) * std::cos(0.5), 27.0, 0.25, 0.0;
  exact.col(0) /= 1e12;
  exact(0, 1) = -std::exp(3.0) * std::sin(0.5) * 1e12;
  for (Eigen::Index p = 0; p < 3; ++p) {
    for (Eigen::Index i = 0; i < 4; ++i) {
      CHECK(std::abs(d.values()(i, p) - exact(i, p)) <= d.errors()(i, p));
    }
  }
  for (const Eigen::Index p : {0, 1}) {
    CHECK(d.errors().col(p).norm() <= 1e-8 * exact.col(p).norm());
  }
  CHECK(d.values().row(3).norm() == 0.0);
  CHECK(d.reports()[2].status == DerivativeStatus::flat);
  CHECK(d.evaluations() <= 40);
}

TEST_CASE("Failures that leave nothing to differentiate are refused in the code's own words") {
  const Parameters two{{"tilt", 1.0}, {"glow", 2.0}};
  const auto growing = [](const Point<double>& at) {
    return std::vector<double>(at["tilt"] > 1.0 ? 4 : 3, at["tilt"]);
  };
  CHECK_THROWS_WITH_AS((void)differentiate(two, growing),
                       doctest::Contains("parameter \"tilt\", moved: length of the data vector: "
                                         "got 4, expected 3"),
                       whet::ObservableError);
  const auto broken = [](const Point<double>& at) {
    return std::vector<double>{at["tilt"] != 1.0 ? std::nan("") : 1.0, at["glow"]};
  };
  CHECK_THROWS_WITH_AS((void)differentiate(two, broken),
                       doctest::Contains("parameter \"tilt\": the observable failed at every step "
                                         "from 1; it said: element 0 is nan"),
                       whet::ObservableError);
  const auto throwing = [](const Point<double>& at) -> std::vector<double> {
    if (at["glow"] != 2.0) throw std::runtime_error("no convergence");
    return {1.0, at["tilt"]};
  };
  CHECK_THROWS_WITH_AS((void)differentiate(two, throwing),
                       doctest::Contains("parameter \"glow\": the observable failed at every step "
                                         "from 2; it said: no convergence"),
                       whet::ObservableError);
  const auto never = [](const Point<double>&) -> std::vector<double> {
    throw std::runtime_error("licence expired");
  };
  CHECK_THROWS_WITH_AS((void)differentiate(two, never),
                       doctest::Contains("failed at the fiducial point (tilt = 1, glow = 2); it "
                                         "said: licence expired"),
                       whet::ObservableError);
  CHECK_THROWS_WITH_AS((void)differentiate(two, growing, {.accuracy = 0.0}),
                       doctest::Contains("accuracy 0"), whet::ParameterError);
}

TEST_CASE("Ninety-nine in a hundred claims on random functions hold") {
  int honest_count = 0, count = 0;
  for (const double accuracy : {1e-2, 1e-6, 1e-10}) {
    std::mt19937_64 random(20261201);
    for (const char* family : whet::test::families) {
      for (const auto output :
           {whet::test::Output::clean, whet::test::Output::noisy, whet::test::Output::rounded}) {
        for (int k = 0; k < 15; ++k) {
          const auto made = whet::test::random_function(family, output, random);
          const auto d = derivative_of(made.parameter, made.f, accuracy);
          // The derivative it is compared with is itself rounded.
          const double own = 4e-16 * std::abs(made.derivative);
          honest_count += std::abs(d.values()(0, 0) - made.derivative) <= d.errors()(0, 0) + own;
          ++count;
        }
      }
    }
  }
  CHECK(count == 1080);
  CHECK(honest_count >= 0.99 * count);
}

TEST_CASE("Among many elements with noise none is taken for a kink") {
  int kinks = 0;
  for (std::uint64_t seed = 0; seed < 100; ++seed) {
    const auto curve = [seed](const whet::Point<double>& at) {
      std::vector<double> data;
      for (std::uint64_t i = 0; i < 40; ++i) {
        const double x = 0.1 * static_cast<double>(i + 1);
        data.push_back(std::exp(-at["k"] * x) +
                       1e-4 * whet::test::hash_noise(at["k"], 40 * seed + i));
      }
      return data;
    };
    const auto d = whet::differentiate(whet::Parameters{{.name = "k", .fiducial = 0.8}}, curve,
                                       {.accuracy = 1e-6});
    kinks += d.reports()[0].status == whet::DerivativeStatus::kink ? 1 : 0;
  }
  CHECK(kinks == 0);
}

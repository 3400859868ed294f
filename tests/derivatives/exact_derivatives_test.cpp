#include <whet/derivatives/exact_derivatives.hpp>

#include <cmath>
#include <limits>
#include <stdexcept>
#include <string>
#include <vector>

#include <doctest/doctest.h>
#include <boost/multiprecision/cpp_bin_float.hpp>

#include <support/close_to.hpp>
#include <whet/observables/concatenate.hpp>
#include <whet/observables/labelled.hpp>
#include <whet/observables/tabulate.hpp>

using whet::exact;
using whet::ObservableError;
using whet::Parameters;
using whet::Point;
using whet::detail::exact_derivatives;
using whet::test::close_to;

namespace {

const std::vector<double> times{0.0, 0.25, 1.0, 7.0};
const Parameters decay{{"amplitude", 2.0}, {"rate", 0.5}};

const auto signal = [](const auto& at) {
  using std::exp;
  const auto amplitude = at["amplitude"], rate = at["rate"];
  return whet::tabulate(times, [&](double t) { return amplitude * exp(-rate * t); });
};

/// sum_p p theta_p^2 in one element, theta_0 in another.
const auto squares = [](const auto& at) {
  const auto& values = at.values();
  auto sum = 0.0 * values[0];
  for (std::size_t p = 0; p < values.size(); ++p)
    sum += static_cast<double>(p) * values[p] * values[p];
  return std::vector{sum, values[0]};
};

Parameters many(int count) {
  return Parameters(whet::numbered("t", count, {.name = "", .fiducial = 1.5}));
}

}  // namespace

TEST_CASE("A decaying signal has the derivatives of its closed form and no error") {
  const auto derivatives = exact_derivatives(decay, exact(signal));
  for (Eigen::Index i = 0; i < 4; ++i) {
    const double t = times[static_cast<std::size_t>(i)], e = std::exp(-0.5 * t);
    CHECK(derivatives.values()(i, 0) == close_to(e, 1e-15));
    CHECK(derivatives.values()(i, 1) == close_to(-2.0 * t * e, 1e-15));
  }
  CHECK(derivatives.errors().isZero(0.0));
  CHECK(derivatives.parameters() == decay);
  CHECK(derivatives.reports().at(1).status == whet::DerivativeStatus::exact);
}

TEST_CASE("The mean is bit for bit what a plain call gives") {
  const auto rich = [](const auto& at) {
    using std::cos, std::erf, std::hypot, std::log1p, std::pow, std::sqrt;
    const auto a = at["amplitude"], k = at["rate"];
    return std::vector{a / 3.0 + k / a,      pow(a, 1.7) - 2 / k,      sqrt(k) * cos(130 * a),
                       erf(k) * hypot(a, k), pow(k, 3) + log1p(a * k), 1.0 - a * k};
  };
  CHECK(exact_derivatives(decay, exact(rich)).mean() ==
        whet::detail::to_vector(rich(Point<double>(decay))));
}

TEST_CASE("One call serves eight parameters, and the data vector comes with it") {
  for (const auto& [count, passes] : {std::pair{1, 1}, {8, 1}, {9, 2}, {16, 2}, {17, 3}}) {
    int calls = 0;
    const auto counted = [&calls](const auto& at) {
      ++calls;
      return squares(at);
    };
    const auto derivatives = exact_derivatives(many(count), exact(counted));
    CHECK(calls == passes);
    CHECK(derivatives.evaluations() == passes);
    for (Eigen::Index p = 0; p < count; ++p) {
      CHECK(derivatives.values()(0, p) == 3.0 * static_cast<double>(p));
      CHECK(derivatives.values()(1, p) == (p == 0 ? 1.0 : 0.0));
    }
  }
}

TEST_CASE("Without parameters there is a mean and no column") {
  const auto constant = [](const auto& at) {
    return std::vector<typename std::decay_t<decltype(at.values())>::value_type>{3.0, 4.0};
  };
  const auto derivatives = exact_derivatives(Parameters{}, exact(constant));
  CHECK(derivatives.mean() == Eigen::Vector2d(3.0, 4.0));
  CHECK(derivatives.values().cols() == 0);
}

TEST_CASE("Eigen columns serve as well as std::vector") {
  const auto columns = [](const auto& at) {
    using Scalar = std::decay_t<decltype(at["rate"])>;
    Eigen::Matrix<Scalar, 2, 1> mu(at["amplitude"], at["rate"]);
    Eigen::Matrix<Scalar, Eigen::Dynamic, 1> scaled = at["rate"] * mu;
    return scaled;
  };
  const auto derivatives = exact_derivatives(decay, exact(columns));
  CHECK(derivatives.values() == Eigen::Matrix2d{{0.5, 2.0}, {0.0, 1.0}});
}

TEST_CASE("The same observable gives its Jacobian to fifty digits") {
  using Wide = boost::multiprecision::number<boost::multiprecision::cpp_bin_float<50>,
                                             boost::multiprecision::et_off>;
  const auto jacobian = whet::detail::exact_jacobian<Wide>(decay, exact(signal));
  const Wide want = -2 * exp(-Wide(1) / 2);  // t = 1
  CHECK(static_cast<double>(abs(jacobian.values(2, 1) / want - 1)) < 1e-48);
  CHECK(static_cast<double>(jacobian.mean(2)) == 2.0 * std::exp(-0.5));
}

TEST_CASE("Parts that are exact make an exact whole, with its labels") {
  const auto whole = whet::concatenate(whet::labelled(exact(squares), {"sum", "first"}),
                                       exact(whet::labelled(signal, {"a", "b", "c", "d"})));
  static_assert(whet::detail::has_exact_derivatives<std::decay_t<decltype(whole)>>);
  const auto derivatives = exact_derivatives(decay, whole);
  CHECK(derivatives.mean().size() == 6);
  CHECK(derivatives.labels() == std::vector<std::string>{"sum", "first", "a", "b", "c", "d"});
  CHECK(derivatives.values()(0, 1) == 1.0);
}

TEST_CASE("A derivative that is not finite is refused by parameter and element") {
  const auto root = [](const auto& at) {
    using std::sqrt;
    return std::vector{at["still"] + 0.0 * at["mass"], sqrt(at["mass"])};
  };
  const Parameters parameters{{"still", 1.0}, {"mass", 0.0}};
  CHECK_THROWS_WITH_AS((void)exact_derivatives(parameters, exact(root)),
                       doctest::Contains("parameter \"mass\", derivative of element 1: got inf, "
                                         "expected a finite value"),
                       ObservableError);
  CHECK_THROWS_WITH_AS(
      (void)exact_derivatives(parameters, exact(whet::labelled(root, {"x", "l = 40"}))),
      doctest::Contains("element 1 (l = 40)"), ObservableError);
}

TEST_CASE("A value that is not finite is refused by element") {
  const auto broken = [](const auto& at) {
    return std::vector{at["rate"], at["rate"] * std::numeric_limits<double>::quiet_NaN()};
  };
  CHECK_THROWS_WITH_AS((void)exact_derivatives(decay, exact(broken)),
                       doctest::Contains("element 1 at the fiducial point: got nan"),
                       ObservableError);
}

TEST_CASE("An exception comes through in the code's own words, with the parameters of the call") {
  const auto failing = [](const auto& at) {
    if (at["t[8]"] > 0.0) throw std::runtime_error("no convergence");
    return squares(at);
  };
  CHECK_THROWS_WITH_AS(
      (void)exact_derivatives(many(9), exact(failing)),
      doctest::Contains("failed at the fiducial point, differentiated by t[0], t[1]"),
      ObservableError);
  CHECK_THROWS_WITH_AS((void)exact_derivatives(many(9), exact(failing)),
                       doctest::Contains("got no convergence"), ObservableError);
  const auto odd = [](const auto& at) {
    if (at["rate"] > 0.0) throw 7;
    return std::vector{at["rate"]};
  };
  CHECK_THROWS_WITH_AS((void)exact_derivatives(decay, exact(odd)),
                       doctest::Contains("no std::exception"), ObservableError);
}

TEST_CASE("A data vector that changes its length is refused with both lengths") {
  int calls = 0;
  const auto growing = [&calls](const auto& at) {
    auto data = squares(at);
    if (++calls > 1) data.push_back(data.back());
    return data;
  };
  CHECK_THROWS_WITH_AS((void)exact_derivatives(many(9), exact(growing)),
                       doctest::Contains("differentiated by t[8]: got 3, expected 2"),
                       ObservableError);
}

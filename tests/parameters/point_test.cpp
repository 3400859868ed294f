#include <whet/parameters/point.hpp>

#include <string>
#include <vector>

#include <doctest/doctest.h>

#include <whet/derivatives/dual.hpp>

using whet::numbered;
using whet::ParameterError;
using whet::Parameters;
using whet::Point;

namespace {

const Parameters parameters =
    Parameters{{"h", 0.7}, {"n", 0.96}}.with(numbered("bias", std::vector{1.0, 1.5, 2.0}));

}  // namespace

TEST_CASE("A point of parameters stands at their fiducial values") {
  const Point<double> at(parameters);
  CHECK(at["h"] == 0.7);
  CHECK(at["bias[2]"] == 2.0);
  CHECK(at.values() == std::vector<double>{0.7, 0.96, 1.0, 1.5, 2.0});
  CHECK(at.names() == parameters.names());
}

TEST_CASE("Values are given in the order of the parameters") {
  const Point<double> at(parameters, {1.0, 2.0, 3.0, 4.0, 5.0});
  CHECK(at["n"] == 2.0);
  CHECK(at("bias", 1) == 4.0);
}

TEST_CASE("A member of a family is found without composing its name") {
  const Point<double> at(parameters);
  for (Eigen::Index i = 0; i < 3; ++i) {
    CHECK(&at("bias", i) == &at["bias[" + std::to_string(i) + "]"]);
  }
}

TEST_CASE("A point of dual numbers begins as constants") {
  const Point<whet::Dual<double, 1>> at(parameters);
  CHECK(at["n"].value() == 0.96);
  CHECK(at["n"].gradient()[0] == 0.0);
}

TEST_CASE("A point outlives the parameters it was made of") {
  const Point<double> at = [] {
    const Parameters brief{{"x", 3.0}};
    return Point<double>(brief);
  }();
  CHECK(at["x"] == 3.0);
}

TEST_CASE("A name or member that is not there is refused with those that are") {
  const Point<double> at(parameters);
  CHECK_THROWS_WITH_AS((void)at["H"], doctest::Contains("Point: parameter \"H\": not among h, n"),
                       ParameterError);
  CHECK_THROWS_WITH_AS((void)at("bias", 3), doctest::Contains("\"bias[3]\": not among"),
                       ParameterError);
  CHECK_THROWS_WITH_AS((void)at("bias", -1), doctest::Contains("\"bias[-1]\": not among"),
                       ParameterError);
  CHECK_THROWS_WITH_AS((void)at("shear", 0), doctest::Contains("\"shear[0]\""), ParameterError);
}

TEST_CASE("A number of values that is not that of the parameters is refused") {
  CHECK_THROWS_WITH_AS(Point<double>(parameters, {1.0, 2.0}),
                       "Point: number of values: got 2, expected 5", ParameterError);
}

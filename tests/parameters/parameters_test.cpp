#include <whet/parameters/parameters.hpp>

#include <cmath>
#include <limits>
#include <string>
#include <vector>

#include <doctest/doctest.h>

#include <whet/parameters/point.hpp>

using whet::numbered;
using whet::Parameter;
using whet::ParameterError;
using whet::Parameters;

namespace {

const Parameters three{{"h", 0.7}, {"n", 0.96}, {"omega", 0.3}};

void refused(const Parameter& parameter, const char* text) {
  CHECK_THROWS_WITH_AS(Parameters{parameter}, doctest::Contains(text), ParameterError);
}

}  // namespace

TEST_CASE("Parameters keep their order and are found by name and position") {
  CHECK(three.size() == 3);
  CHECK(three.names() == std::vector<std::string>{"h", "n", "omega"});
  CHECK(three.index("omega") == 2);
  CHECK(three["n"].fiducial == 0.96);
  CHECK(three[0].name == "h");
  CHECK(three.contains("h"));
  CHECK(!three.contains("H"));
  CHECK(three.fiducials() == Eigen::Vector3d(0.7, 0.96, 0.3));
  std::string all;
  for (const Parameter& p : three) all += p.name;
  CHECK(all == "hnomega");
}

TEST_CASE("No parameters are something to begin with") {
  const Parameters none;
  CHECK(none.empty());
  CHECK(none.size() == 0);
  CHECK(none.with({"h", 0.7}) == Parameters{{"h", 0.7}});
  CHECK_THROWS_WITH_AS((void)none["h"], doctest::Contains("not among the names: there are none"),
                       ParameterError);
}

TEST_CASE("Adding a parameter returns a longer list and leaves the old one alone") {
  const Parameters longer = three.with({"bias", 1.0}).with(numbered("shift", 2, {}));
  CHECK(longer.names() ==
        std::vector<std::string>{"h", "n", "omega", "bias", "shift[0]", "shift[1]"});
  CHECK(three.size() == 3);
  CHECK_THROWS_WITH_AS((void)three.with({"h", 0.8}), doctest::Contains("\"h\" is given twice"),
                       ParameterError);
}

TEST_CASE("Equality is by every property and by order") {
  CHECK(three == Parameters{{"h", 0.7}, {"n", 0.96}, {"omega", 0.3}});
  CHECK(three != Parameters{{"n", 0.96}, {"h", 0.7}, {"omega", 0.3}});
  CHECK(Parameters{{"h", 0.7}} != Parameters{{.name = "h", .fiducial = 0.7, .unit = "K"}});
}

TEST_CASE("A group lists the members of a numbered family") {
  const Parameters all = three.with(numbered("bias", 11, {}));
  const auto group = all.group("bias");
  CHECK(group.size() == 11);
  CHECK(group.front() == "bias[0]");
  CHECK(group.back() == "bias[10]");
  CHECK_THROWS_WITH_AS((void)all.group("shear"), doctest::Contains("\"shear[0]\": not among h, n"),
                       ParameterError);
  CHECK_THROWS_AS((void)all.group("h"), ParameterError);
}

TEST_CASE("A family has its members by number, wherever they stand and whoever is missing") {
  const Parameters mixed{{"b[5]", 3.0}, {"b[0]", 1.0}, {"h", 0.7}, {"b[1]", 2.0}, {"b[x]", 4.0}};
  CHECK(mixed.group("b") == std::vector<std::string>{"b[0]", "b[1]", "b[5]"});
  CHECK(whet::Point<double>(mixed)("b", 5) == 3.0);
  CHECK_THROWS_WITH_AS((void)whet::Point<double>(mixed)("b", 2),
                       doctest::Contains("\"b[2]\": not among"), ParameterError);
}

TEST_CASE("A name that is not there is refused with those that are") {
  CHECK_THROWS_WITH_AS(
      (void)three["omga"],
      "Parameters: parameter \"omga\": not among h, n, omega. Correct the spelling or list "
      "parameters().",
      ParameterError);
  CHECK_THROWS_AS((void)three.index(""), ParameterError);
  const Parameters many(numbered("b", 30, {}));
  CHECK_THROWS_WITH_AS((void)many["h"], doctest::Contains("b[19], ... (30 in all)"),
                       ParameterError);
}

TEST_CASE("A name given twice or empty is refused") {
  CHECK_THROWS_WITH_AS((Parameters{{"h", 1.0}, {"h", 1.0}}),
                       "Parameters: parameter \"h\" is given twice. Names must differ.",
                       ParameterError);
  refused({"", 1.5}, "a parameter with fiducial value 1.5: got an empty name, expected a name");
}

TEST_CASE("A fiducial value that is not finite or outside its bounds is refused") {
  refused({"h", std::nan("")}, "parameter \"h\", fiducial: got nan, expected a finite value");
  refused({"h", HUGE_VAL}, "parameter \"h\", fiducial: got inf");
  refused({.name = "mass", .fiducial = -1.0, .lower = 0.0},
          "parameter \"mass\", fiducial: got -1, expected a value in [0, inf]");
  refused({.name = "mass", .fiducial = 2.0, .upper = 1.0}, "got 2, expected a value in [-inf, 1]");
  CHECK_NOTHROW(Parameters{{.name = "mass", .fiducial = 0.0, .lower = 0.0}});
}

TEST_CASE("Bounds out of order and a scale that is none are refused") {
  refused({.name = "h", .fiducial = 0.5, .lower = 1.0, .upper = 0.0},
          "parameter \"h\", lower bound: got 1, expected a value below the upper bound 0");
  refused({.name = "h", .fiducial = 0.5, .lower = 0.5, .upper = 0.5}, "lower bound: got 0.5");
  refused({.name = "h", .fiducial = 0.5, .lower = std::nan("")}, "lower bound: got nan");
  refused({.name = "h", .fiducial = 0.5, .upper = std::nan("")}, "the upper bound nan");
  refused({.name = "h", .fiducial = 0.5, .scale = -1.0}, "scale: got -1");
  refused({.name = "h", .fiducial = 0.5, .scale = HUGE_VAL}, "scale: got inf");
  refused({.name = "h", .fiducial = 0.5, .scale = std::nan("")}, "scale: got nan");
}

TEST_CASE("Copies share one table of names") {
  const Parameters copy = three;
  CHECK(copy.table() == three.table());
  CHECK(copy == three);
}

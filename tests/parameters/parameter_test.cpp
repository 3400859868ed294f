#include <whet/parameters/parameter.hpp>

#include <cmath>
#include <limits>
#include <vector>

#include <doctest/doctest.h>

using whet::numbered;
using whet::Parameter;
using whet::ParameterError;

TEST_CASE("A parameter is set by position or by name, the rest at rest") {
  const Parameter brief{"h", 0.7};
  CHECK(brief == Parameter{.name = "h", .fiducial = 0.7});
  CHECK(brief.lower == -std::numeric_limits<double>::infinity());
  CHECK(brief.upper == std::numeric_limits<double>::infinity());
  CHECK(brief.scale == 0.0);
  CHECK(brief.label.empty());
  CHECK(brief != Parameter{"h", 0.8});
}

TEST_CASE("A numbered family runs from 0 and is like its prototype but for name and label") {
  const auto bias = numbered("bias", 3, {.fiducial = 1.5, .lower = 0.0, .label = "b", .unit = "K"});
  CHECK(bias.size() == 3);
  CHECK(bias[0].name == "bias[0]");
  CHECK(bias[2].name == "bias[2]");
  CHECK(bias[2].label == "b[2]");
  CHECK(bias[2].fiducial == 1.5);
  CHECK(bias[2].lower == 0.0);
  CHECK(bias[2].unit == "K");
  CHECK(numbered("bias", 12, {})[11].name == "bias[11]");
  CHECK(numbered("bias", 1, {})[0].label.empty());
}

TEST_CASE("A numbered family may have a fiducial value for each member") {
  const auto bias = numbered("bias", std::vector{1.0, 1.5}, {.scale = 0.1});
  CHECK(bias.size() == 2);
  CHECK(bias[1] == Parameter{.name = "bias[1]", .fiducial = 1.5, .scale = 0.1});
}

TEST_CASE("A family without a name or members is refused") {
  CHECK_THROWS_WITH_AS(
      (void)numbered("bias", 0, {}),
      "numbered: family \"bias\": got a count of 0, expected a name and a count >= 1",
      ParameterError);
  CHECK_THROWS_WITH_AS((void)numbered("", 2, {}), doctest::Contains("family \"\""), ParameterError);
  CHECK_THROWS_AS((void)numbered("bias", std::vector<double>{}), ParameterError);
}

#include <whet/derivatives/line.hpp>

#include <cmath>

#include <doctest/doctest.h>

#include <support/close_to.hpp>

using whet::detail::Line;
using whet::test::close_to;

TEST_CASE("The first step is a part of the scale, else of the value, else of the width") {
  CHECK(Line({.name = "a", .fiducial = 3e12}).first_step() == close_to(0.1037e12 * 3, 1e-3));
  CHECK(Line({.name = "a", .fiducial = 5.0, .scale = 1e-9}).first_step() ==
        close_to(1.037e-10, 1e-3));
  CHECK(Line({.name = "a", .lower = -1.0, .upper = 1.0}).first_step() == close_to(0.0622, 1e-3));
  CHECK(Line({.name = "a"}).first_step() == 0.0);
}

TEST_CASE("A displacement is exact and never crosses a bound") {
  const Line line({.name = "a", .fiducial = 0.1, .lower = 0.0, .upper = 0.15});
  for (const double t : {0.03, -0.07, 1.0, -5.0, 1e-9}) {
    const auto place = line.place(t);
    CHECK(place.value - 0.1 == place.displacement);
    CHECK(place.value >= 0.0);
    CHECK(place.value <= 0.15);
  }
}

TEST_CASE("A near bound shortens the steps, a very near one takes its side away") {
  const Line near({.name = "a", .fiducial = 1.0, .lower = 0.95});
  CHECK(near.fitted(0.1) < 0.05);
  CHECK(near.rung(near.fitted(0.1)).size() == 2);
  const Line at({.name = "a", .fiducial = 0.0, .lower = 0.0, .scale = 1.0});
  CHECK(at.only_side(0.1) == 1);
  CHECK(at.rung(0.1) == std::vector<double>{0.1});
}

TEST_CASE("A call that fails is a bound before its place") {
  Line line({.name = "a", .fiducial = 1.0});
  line.failed(-0.2);
  CHECK(line.room(-1) == close_to(0.11, 1e-12));
  CHECK(line.rung(0.1).size() == 2);
  CHECK(line.rung(0.15) == std::vector<double>{0.15});
}

#include <whet/support/error.hpp>

#include <stdexcept>
#include <string>
#include <type_traits>

#include <doctest/doctest.h>

using whet::detail::fail;
using whet::detail::message;

TEST_CASE("A message is composed of where, what, got, expected and advice") {
  CHECK(message({.where = "integrating_out",
                 .what = "parameter \"omega\"",
                 .got = "1",
                 .expected = "2",
                 .advice = "Correct it."}) ==
        "integrating_out: parameter \"omega\": got 1, expected 2. Correct it.");
}

TEST_CASE("Parts that are empty leave no trace") {
  CHECK(message({.where = "f", .what = "x"}) == "f: x");
  CHECK(message({.where = "f", .what = "x", .got = "1"}) == "f: x: got 1");
  CHECK(message({.where = "f", .what = "x", .expected = "2"}) == "f: x: expected 2");
  CHECK(message({.where = "f", .what = "x", .advice = "Stop."}) == "f: x. Stop.");
}

TEST_CASE("Every exception is an Error and a runtime_error of its own type") {
  CHECK_THROWS_AS(fail<whet::ParameterError>({.where = "f"}), whet::ParameterError);
  CHECK_THROWS_AS(fail<whet::ObservableError>({.where = "f"}), whet::Error);
  CHECK_THROWS_AS(fail<whet::CovarianceError>({.where = "f"}), whet::Error);
  CHECK_THROWS_AS(fail<whet::DerivativeError>({.where = "f"}), whet::Error);
  CHECK_THROWS_WITH_AS(fail<whet::FileError>({.where = "f", .what = "x"}), "f: x",
                       std::runtime_error);
  static_assert(!std::is_base_of_v<whet::ParameterError, whet::ObservableError>);
}

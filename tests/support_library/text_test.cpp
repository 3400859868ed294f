#include <whet/support/text.hpp>

#include <cmath>
#include <cstdlib>
#include <limits>
#include <string>
#include <vector>

#include <doctest/doctest.h>

using whet::detail::in_quotes;
using whet::detail::listed;
using whet::detail::text;

TEST_CASE("A number is written with the fewest digits that give it back") {
  CHECK(text(0.1) == "0.1");
  CHECK(text(-1.0) == "-1");
  CHECK(text(3e-9) == "3e-09");
  CHECK(text(0.0) == "0");
  for (const double value : {1.0 / 3.0, 5e-324, -1.7976931348623157e308, 0.1 + 0.2}) {
    CHECK(std::strtod(text(value).c_str(), nullptr) == value);
  }
}

TEST_CASE("What is no number is written in words") {
  CHECK(text(std::numeric_limits<double>::infinity()) == "inf");
  CHECK(text(-std::numeric_limits<double>::infinity()) == "-inf");
  CHECK(text(std::nan("")) == "nan");
}

TEST_CASE("A number is rounded to the digits asked for") {
  CHECK(text(2.0 / 3.0, 3) == "0.667");
  CHECK(text(123456.0, 2) == "1.2e+05");
  CHECK(text(1.5, 6) == "1.5");
}

TEST_CASE("Whole numbers of any type are written as they are") {
  CHECK(text(-7) == "-7");
  CHECK(text(std::size_t{18446744073709551615u}) == "18446744073709551615");
}

TEST_CASE("Names are quoted, and a long list says how many there are") {
  CHECK(in_quotes("h") == "\"h\"");
  CHECK(listed(std::vector<std::string>{}).empty());
  CHECK(listed(std::vector<std::string>{"h", "n"}) == "h, n");
  CHECK(listed(std::vector<std::string>(20, "x")).find("...") == std::string::npos);
  const std::string cut = listed(std::vector<std::string>(21, "x"));
  CHECK(cut.find(", ... (21 in all)") != std::string::npos);
  CHECK(cut.size() == 20 * 3 - 2 + 17);  // twenty names, then the count
}

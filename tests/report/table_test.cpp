#include <whet/report/table.hpp>

#include <cmath>
#include <limits>
#include <sstream>
#include <string>
#include <utility>
#include <vector>

#include <doctest/doctest.h>

#include <whet/information/gaussian_prior.hpp>

using whet::ErrorSources;
using whet::Forecast;
using whet::Information;
using whet::Parameters;
using whet::detail::rounded;

namespace {

/// The table of an information with that root and those column errors.
std::string table(const Parameters& parameters, const Eigen::MatrixXd& root,
                  const Eigen::VectorXd& errors, std::vector<std::string> notes = {}) {
  Information::Parts parts;
  parts.parameters = parameters;
  parts.root = whet::RootInformation::from_root(root, parameters.size(),
                                                {ErrorSources::of_columns(errors), {}});
  parts.notes = std::move(notes);
  std::ostringstream out;
  out << Forecast(Information(std::move(parts)));
  return out.str();
}

}  // namespace

TEST_CASE("The table gives each parameter its values by hand, and lines its columns up") {
  // R = [[10, 0, 0], [0, 4, 3], [0, 0, 0.5]]: sigma_2 = 2, sigma_1 = hypot(1/4, 3/4 * 2) = 1.5207;
  // if the others are known, 1/|column|: 1/10, 1/4, 1/hypot(3, 0.5) = 0.32880.
  const Parameters parameters{{.name = "rate", .fiducial = 0.4, .unit = "1/s"},
                              {.name = "\u03c3", .fiducial = -123456789.0},
                              {.name = "tilt", .fiducial = 0.0, .unit = "\u00b5m"}};
  Eigen::MatrixXd root(3, 3);
  root << 10.0, 0.0, 0.0, 0.0, 4.0, 3.0, 0.0, 0.0, 0.5;
  CHECK(table(parameters, root, Eigen::Vector3d(1e-6, 1e-8, 1e-8)) ==
        "parameter       fiducial   sigma  % of fiducial  if others known  numerical error\n"
        "rate [1/s]           0.4  0.1000           25.0           0.1000         < 0.01 %\n"
        "\u03c3           -1.23457e+08   1.521       1.23e-06           0.2500         < 0.01 %\n"
        "tilt [\u00b5m]              0   2.000              -           0.3288         < 0.01 %\n");
}

TEST_CASE(
    "A sigma shows its digits up to the first that the numerical error blurs, and the error beside "
    "it") {
  const Parameters one{{.name = "h", .fiducial = 0.7}};
  const auto line = [&](double error) {
    const std::string all =
        table(one, Eigen::MatrixXd::Constant(1, 1, 7.0), Eigen::VectorXd::Constant(1, error));
    return all.substr(all.find('\n') + 1);
  };
  // One column: sigma = 1/7 = 0.142857, its error to first order the column's over 7.
  CHECK(line(7e-7) ==
        "h               0.7  0.1429           20.4           0.1429         < 0.01 %\n");
  CHECK(line(0.014) ==
        "h               0.7  0.143           20.4            0.143           0.20 %\n");
  CHECK(line(0.35).starts_with("h               0.7   0.14             20             0.14  "));
  CHECK(line(3.5).starts_with("h               0.7    0.1             20              0.1  "));
}

TEST_CASE("What is not measured says so in place of a number, with the direction below") {
  const Parameters parameters{{.name = "inner", .fiducial = 1.0},
                              {.name = "outer", .fiducial = 1.0},
                              {.name = "unseen", .fiducial = 2.0},
                              {.name = "h", .fiducial = 0.5}};
  Eigen::MatrixXd root = Eigen::MatrixXd::Zero(4, 4);
  root(0, 0) = root(0, 1) = 8.0;
  root(3, 3) = 4.0;
  const std::string text = table(parameters, root, Eigen::Vector4d::Constant(1e-9));
  CHECK(text.find("inner             1  not measured              -           0.1250              "
                  "  -\n") != std::string::npos);
  CHECK(text.find("unseen            2  not measured              -     not measured              "
                  "  -\n") != std::string::npos);
  CHECK(text.find("h               0.5        0.2500           50.0           0.2500         "
                  "< 0.01 %\n") != std::string::npos);
  CHECK(text.find("\nnote: not measured: unseen") != std::string::npos);
  CHECK(text.find("\nnote: not measured: inner - outer") != std::string::npos);
}

TEST_CASE("Notes are wrapped below the table, however long a word is") {
  const std::string word(90, 'x');
  const std::string text =
      table({{.name = "h", .fiducial = 0.7}}, Eigen::MatrixXd::Ones(1, 1), Eigen::VectorXd::Zero(1),
            {"the covariance came from 40 simulations, so that each sigma is on average three per "
             "cent too small",
             "a " + word + " b", ""});
  CHECK(text.substr(text.find("note:")) ==
        "note: the covariance came from 40 simulations, so that each sigma is on average\n"
        "      three per cent too small\n"
        "note: a\n      " +
            word +
            "\n      b\n"
            "note: \n");
}

TEST_CASE("A number is rounded to its significant digits, with zeros where they say something") {
  CHECK(rounded(0.1, 4) == "0.1000");
  CHECK(rounded(12.02, 1) == "10");
  CHECK(rounded(9.9996, 4) == "10.00");
  CHECK(rounded(123456.0, 2) == "120000");
  CHECK(rounded(999999.0, 3) == "1.00e+06");
  CHECK(rounded(-2.5e-4, 2) == "-0.00025");
  CHECK(rounded(9.9999e-5, 2) == "0.00010");
  CHECK(rounded(1.234e-30, 3) == "1.23e-30");
  CHECK(rounded(0.0, 3) == "0.00");
}

TEST_CASE("Errors beyond any bound say so, and never show more than one digit") {
  CHECK(whet::detail::error_in_words(std::numeric_limits<double>::infinity()) == "no bound");
  CHECK(whet::detail::sigma_in_words(0.1234, std::numeric_limits<double>::infinity()) == "0.1");
  CHECK(whet::detail::sigma_in_words(0.1234, 0.7) == "0.1");
  CHECK(whet::detail::digits_shown(0.0, 4) == 4);
  CHECK(whet::detail::digits_shown(1e-9, 4) == 4);
  CHECK(whet::detail::digits_shown(0.02, 4) == 2);
}

#include <whet/information/information.hpp>

#include <algorithm>
#include <cmath>
#include <map>
#include <string>
#include <vector>

#include <doctest/doctest.h>
#include <Eigen/LU>

#include <whet/forecasts/forecast.hpp>

#include <information/random_problems.hpp>
#include <support/close_to.hpp>

using whet::Forecast;
using whet::GaussianPrior;
using whet::Information;
using whet::ParameterError;
using whet::Parameters;
using whet::test::close_to;
using whet::test::Draws;
using whet::test::information_of;
using whet::test::LongMatrix;
using whet::test::LongVector;
using whet::test::named;
using whet::test::true_sigmas;

namespace {

using Sigmas = std::map<std::string, double>;

Sigmas sigmas_of(const Information& information) {
  const Forecast forecast(information);
  Sigmas sigmas;
  for (const auto& p : information.parameters()) sigmas[p.name] = forecast.sigma(p.name);
  return sigmas;
}

void check_close(const Sigmas& got, const Sigmas& wanted, double relative) {
  REQUIRE(got.size() == wanted.size());
  for (const auto& each : wanted) {
    INFO(each.first);
    REQUIRE(got.contains(each.first));
    CHECK(got.at(each.first) == close_to(each.second, relative));
  }
}

/// Information of rows on named parameters with an experiment's name.
Information experiment(const Parameters& parameters, const Eigen::MatrixXd& rows,
                       const std::string& name) {
  Information::Parts parts = information_of(parameters, rows).parts();
  parts.experiments = {name};
  return Information(parts);
}

/// Ill-conditioned enough to show a wrong step, not so much as to hide it in rounding.
Eigen::MatrixXd rows_of(Draws& draws, Eigen::Index n, Eigen::Index count) {
  Eigen::MatrixXd rows = draws.normal(n, count);
  if (count > 1) rows.col(0) = rows.col(count - 1) + 0.03 * rows.col(0);
  return rows;
}

const Eigen::Matrix3d base{{20.0, 4.0, 3.0}, {4.0, 10.0, 2.0}, {3.0, 2.0, 5.0}};
const Parameters abc{{"a", 2.0}, {"b", 0.5}, {"c", 1.0}};

}  // namespace

TEST_CASE("The order of the parameters does not matter") {
  Draws draws(1);
  for (int trial = 0; trial < 30; ++trial) {
    const Eigen::MatrixXd rows = rows_of(draws, 12, 4);
    const Parameters parameters = named(4);
    Eigen::MatrixXd reversed = rows.rowwise().reverse();
    std::vector<whet::Parameter> list(parameters.begin(), parameters.end());
    std::reverse(list.begin(), list.end());
    check_close(sigmas_of(information_of(Parameters(list), reversed)),
                sigmas_of(information_of(parameters, rows)), 1e-12);
  }
}

TEST_CASE("Units change nothing else, to the last bit where they are powers of two") {
  Draws draws(2);
  const Eigen::MatrixXd rows = rows_of(draws, 12, 3);
  const auto plain = sigmas_of(information_of(named(3), rows));
  for (const int power : {-40, 37}) {
    Eigen::MatrixXd changed = rows;
    changed.col(1) *= std::ldexp(1.0, power);
    auto sigmas = sigmas_of(information_of(named(3), changed));
    sigmas["p1"] *= std::ldexp(1.0, power);
    CHECK(sigmas == plain);
  }
}

TEST_CASE("Joining commutes, associates, and is the information of the data taken together") {
  Draws draws(3);
  const Parameters first = named(3), second{{"p2", 1.0}, {"p3", 1.0}},
                   third{{"p3", 1.0}, {"p0", 1.0}};
  for (int trial = 0; trial < 30; ++trial) {
    const Eigen::MatrixXd a = rows_of(draws, 9, 3), b = rows_of(draws, 5, 2),
                          c = rows_of(draws, 7, 2);
    const Information x = information_of(first, a), y = information_of(second, b),
                      z = information_of(third, c);
    Eigen::MatrixXd all = Eigen::MatrixXd::Zero(21, 4);
    all.block(0, 0, 9, 3) = a;
    all.block(9, 2, 5, 2) = b;
    all.block(14, 3, 7, 1) = c.col(0);
    all.block(14, 0, 7, 1) = c.col(1);
    const Sigmas together = sigmas_of(information_of(named(4), all));
    check_close(sigmas_of((x + y) + z), together, 1e-12);
    check_close(sigmas_of(x + (y + z)), together, 1e-12);
    check_close(sigmas_of(z + (y + x)), together, 1e-12);
    const Eigen::MatrixXd sum = (x + y + z).matrix();
    CHECK((sum - all.transpose() * all).norm() <= 1e-13 * sum.norm());
  }
}

TEST_CASE("Integrating out leaves sigmas and correlations, in one step or several") {
  Draws draws(4);
  for (int trial = 0; trial < 30; ++trial) {
    const Information whole = information_of(named(5), rows_of(draws, 14, 5));
    const Forecast before(whole);
    const Information once = whole.integrating_out({"p0", "p3"});
    const Forecast after(once), twice(whole.integrating_out({"p3"}).integrating_out({"p0"}));
    for (const std::string name : {"p1", "p2", "p4"}) {
      CHECK(after.sigma(name) == close_to(before.sigma(name), 1e-12));
      CHECK(twice.sigma(name) == close_to(before.sigma(name), 1e-12));
      CHECK(std::abs(after.correlation(name, "p1") - before.correlation(name, "p1")) <= 1e-12);
    }
    CHECK(once.parameters().names() == std::vector<std::string>{"p1", "p2", "p4"});
  }
}

TEST_CASE("Holding on both sides and joining is joining and holding") {
  Draws draws(5);
  const Parameters three = named(3);
  const Information a = information_of(three, rows_of(draws, 8, 3)),
                    b = information_of(three, rows_of(draws, 6, 3));
  check_close(sigmas_of(a.holding({"p1"}) + b.holding({"p1"})), sigmas_of((a + b).holding({"p1"})),
              1e-13);
}

TEST_CASE("A nuisance of one side may be integrated out before or after joining the other") {
  Draws draws(6);
  const Information a =
      information_of({{"x", 1.0}, {"y", 1.0}, {"calibration", 0.0}}, rows_of(draws, 8, 3));
  const Information b = information_of({{"x", 1.0}, {"y", 1.0}}, rows_of(draws, 6, 2));
  check_close(sigmas_of(a.integrating_out({"calibration"}) + b),
              sigmas_of((a + b).integrating_out({"calibration"})), 1e-12);
}

TEST_CASE("k times the readings divide every sigma by sqrt(k), and its stated error") {
  Draws draws(7);
  const Information a =
      information_of(named(3), rows_of(draws, 8, 3), Eigen::Vector3d::Constant(1e-5));
  const Forecast one(a), seven(a.repeated(7.0));
  for (const std::string name : {"p0", "p1", "p2"}) {
    CHECK(seven.sigma(name) == close_to(one.sigma(name) / std::sqrt(7.0), 1e-14));
    CHECK(seven.numerical_error(name) ==
          close_to(one.numerical_error(name) / std::sqrt(7.0), 1e-9));
  }
}

TEST_CASE("A bias survives joining, holding, integrating out and replacing") {
  Draws draws(8);
  for (int trial = 0; trial < 50; ++trial) {
    const Eigen::MatrixXd a = rows_of(draws, 10, 4), b = rows_of(draws, 8, 4);
    const Eigen::VectorXd da = draws.normal(10, 1), db = draws.normal(8, 1);
    Eigen::MatrixXd rows_a(10, 5), rows_b(8, 5);
    rows_a << a, da;
    rows_b << b, db;
    const Parameters four = named(4);
    const Information x = information_of(four, rows_a, {"drift"}),
                      y = information_of(four, rows_b, {"drift"});
    const auto closed_form = [](const LongMatrix& rows, const LongVector& shift) {
      const LongMatrix f = rows.transpose() * rows;
      const LongVector bias = f.ldlt().solve(rows.transpose() * shift);
      return Eigen::VectorXd(bias.cast<double>());
    };
    LongMatrix rows(18, 4);
    rows << a.cast<long double>(), b.cast<long double>();
    LongVector shift(18);
    shift << da.cast<long double>(), db.cast<long double>();
    const auto near = [](double got, double wanted, double size) {
      return std::abs(got - wanted) <= 1e-11 * size;
    };
    const Eigen::VectorXd joint = closed_form(rows, shift);
    const Forecast whole(x + y), out((x + y).integrating_out({"p1", "p0"}));
    const auto twice = whet::exact([](const auto& at) { return std::vector{2.0 * at["q"]}; });
    const Forecast replaced((x + y).replacing({"p2"}, {{"q", 0.5}}, twice));
    const LongMatrix last = rows.rightCols(3);
    const Eigen::VectorXd without = closed_form(last, shift);
    const Forecast held(x.holding({"p0"}) + y.holding({"p0"}));
    const double size = joint.norm();
    for (Eigen::Index p = 0; p < 4; ++p) {
      CHECK(near(whole.bias(four[p].name, "drift"), joint(p), size));
      if (p > 1) CHECK(near(out.bias(four[p].name, "drift"), joint(p), size));
      if (p > 0) CHECK(near(held.bias(four[p].name, "drift"), without(p - 1), without.norm()));
    }
    CHECK(near(replaced.bias("q", "drift"), 0.5 * joint(2), size));
    CHECK(near(replaced.bias("p0", "drift"), joint(0), size));
    // A prior pulls back: the closed form with a row 1 / sigma and no shift.
    LongMatrix more = LongMatrix::Zero(19, 4);
    more.topRows(18) = rows;
    more(18, 3) = 1.0L / 0.1L;
    LongVector none = LongVector::Zero(19);
    none.head(18) = shift;
    const Eigen::VectorXd pulled = closed_form(more, none);
    const Forecast with_prior(x + y + GaussianPrior("p3", 0.1));
    for (Eigen::Index p = 0; p < 4; ++p) {
      CHECK(near(with_prior.bias(four[p].name, "drift"), pulled(p), pulled.norm()));
    }
  }
}

TEST_CASE("A systematic that one of two experiments has does not move the other") {
  const Information a = information_of({{"x", 1.0}}, Eigen::MatrixXd{{1.0, 0.5}}, {"leak"});
  const Information b = information_of({{"x", 1.0}}, Eigen::MatrixXd{{1.0, 2.0}}, {"drift"});
  const Forecast joint(a + b);
  CHECK(joint.bias("x", "leak") == close_to(0.25, 1e-14));
  CHECK(joint.bias("x", "drift") == close_to(1.0, 1e-14));
}

TEST_CASE("Marginal, conditional, prior and Schur values of a three by three matrix") {
  // Checked against an independent evaluation at 50 digits (mpmath).
  const Information information = Information::from_matrix(abc, base);
  const Forecast forecast(information);
  CHECK(forecast.sigma("a") == close_to(0.240091878820774, 3e-15));
  CHECK(forecast.sigma("b") == close_to(0.337690816752985, 3e-15));
  CHECK(forecast.sigma("c") == close_to(0.480183757641548, 3e-15));
  CHECK(forecast.conditional_sigma("a") == close_to(0.223606797749979, 3e-15));
  CHECK(forecast.conditional_sigma("b") == close_to(0.316227766016838, 3e-15));
  CHECK(forecast.conditional_sigma("c") == close_to(0.447213595499958, 3e-15));
  const Forecast prior(information + GaussianPrior("c", 0.5));
  CHECK(prior.sigma("a") == close_to(0.236775381926226, 3e-15));
  CHECK(prior.sigma("b") == close_to(0.333876133454043, 3e-15));
  CHECK(prior.sigma("c") == close_to(0.346334879504517, 3e-15));
  const Eigen::MatrixXd schur = information.integrating_out({"c"}).matrix();
  CHECK((schur - Eigen::Matrix2d{{18.2, 2.8}, {2.8, 9.2}}).norm() <= 1e-14 * schur.norm());
}

TEST_CASE("A nested model that is held wrong shifts the others (Heavens, Kitching & Verde 2007)") {
  // delta theta' = -F'^-1 G delta psi, psi = c fixed 0.8 above the truth: F' and G are blocks of
  // the base matrix. As a shift of the data: c is held, and the data are off by -0.8 times the
  // column of c. Values: independent evaluation at 50 digits (mpmath).
  const Eigen::MatrixXd rows = base.llt().matrixU();
  Eigen::MatrixXd shifted(3, 4);
  shifted << rows, -0.8 * rows.col(2);
  const Forecast held(information_of(abc, shifted, {"wrong c"}).holding({"c"}));
  CHECK(held.bias("a", "wrong c") == close_to(-0.0956521739130435, 1e-14));
  CHECK(held.bias("b", "wrong c") == close_to(-0.121739130434783, 1e-14));
}

TEST_CASE("Joining what one side integrated out, held or replaced is refused by name") {
  const Information a = Information::from_matrix(abc, base);
  const Information b = Information::from_matrix({{"c", 1.0}}, Eigen::MatrixXd::Identity(1, 1));
  const auto refused = [](const Information& x, const Information& y, const char* words) {
    CHECK_THROWS_WITH_AS((void)(x + y), doctest::Contains(words), ParameterError);
    CHECK_THROWS_WITH_AS((void)(y + x), doctest::Contains(words), ParameterError);
  };
  refused(a.integrating_out({"c"}), b, "parameter \"c\" was integrated out on one side");
  refused(a.holding({"c"}), b, "parameter \"c\" was held on one side");
  const auto same = whet::exact([](const auto& at) { return std::vector{at["d"]}; });
  refused(a.replacing({"c"}, {{"d", 1.0}}, same), b, "parameter \"c\" was replaced on one side");
  refused(a.integrating_out({"c"}), a.integrating_out({"c"}), "parameter \"c\" was integrated out");
  refused(a.integrating_out({"c"}), a.holding({"c"}), "on one side and");
  CHECK_NOTHROW((void)(a.holding({"c"}) + a.holding({"c"})));
  // The memory is joined too.
  const Information d = Information::from_matrix({{"d", 1.0}}, Eigen::MatrixXd::Identity(1, 1));
  refused(a.integrating_out({"c"}) + d, b, "parameter \"c\" was integrated out on one side");
}

TEST_CASE("Joining other fiducial values, other units or the same experiment is refused") {
  const Eigen::MatrixXd one = Eigen::MatrixXd::Identity(1, 1);
  const Information a = Information::from_matrix({{.name = "h", .fiducial = 0.7}}, one);
  const Information b = Information::from_matrix({{.name = "h", .fiducial = 0.71}}, one);
  const Information c =
      Information::from_matrix({{.name = "h", .fiducial = 0.7, .unit = "km"}}, one);
  CHECK_THROWS_WITH_AS((void)(a + b),
                       doctest::Contains("fiducial value of parameter \"h\": got 0.7 and 0.71"),
                       ParameterError);
  CHECK_THROWS_WITH_AS((void)(a + c),
                       doctest::Contains("unit of parameter \"h\": got \"\" and \"km\""),
                       ParameterError);
  // A few units in the last place are one value.
  const double near = std::nextafter(std::nextafter(0.7, 1.0), 1.0);
  CHECK_NOTHROW((void)(a + Information::from_matrix({{.name = "h", .fiducial = near}}, one)));
  const Information plover = experiment({{"h", 0.7}}, one, "Plover"),
                    avocet = experiment({{"h", 0.7}}, one, "Avocet");
  CHECK_THROWS_WITH_AS((void)(plover + avocet + plover),
                       doctest::Contains("experiment \"Plover\" would count twice"),
                       ParameterError);
  CHECK_NOTHROW((void)(a + a));  // unnamed ones are taken as distinct
}

TEST_CASE("A nuisance that is not measured above its error is noted when it is integrated out") {
  const Eigen::MatrixXd rows{{1.0, 0.5e-3, 0.0}, {0.0, 0.0, 1.0}, {0.5, 0.0, 1.0}};
  const auto notes = [&](const Eigen::VectorXd& sizes, const std::string& name) {
    return information_of(named(3), rows, sizes).integrating_out({name}).notes();
  };
  const Eigen::Vector3d blurred(1e-9, 1e-3, 1e-9), sharp(1e-9, 1e-9, 1e-9);
  REQUIRE(notes(blurred, "p1").size() == 1);
  CHECK(notes(blurred, "p1")[0].find("integrating out p1: a direction among them") == 0);
  CHECK(notes(sharp, "p1").empty());
  CHECK(notes(blurred, "p2").empty());
}

TEST_CASE("Names that are not there, stand twice or were there before are refused") {
  const Information a = Information::from_matrix(abc, base);
  const auto refused = [](const auto& call, const char* words) {
    CHECK_THROWS_WITH_AS((void)call(), doctest::Contains(words), ParameterError);
  };
  refused([&] { return a.integrating_out({"d"}); }, "\"d\": not among a, b, c");
  refused([&] { return a.holding({"d"}); }, "holding: parameter \"d\"");
  refused([&] { return a.holding({"a", "a"}); }, "parameter \"a\" is given twice");
  refused([&] { return a.integrating_out({"a", "b", "c"}); }, "number of parameters: got 0");
  refused([&] { return a.integrating_out({"a"}).holding({"a"}); },
          "parameter \"a\" was integrated out before; left are b, c");
  refused([&] { return a + GaussianPrior("d", 0.1); },
          "joining a prior: parameter \"d\": not among a, b, c");
  refused([&] { return a.holding({"a"}) + GaussianPrior("a", 0.1); },
          "parameter \"a\" was held before; left are b, c");
}

TEST_CASE("Repeating is refused for no number of times, and where a prior was joined") {
  const Information a = Information::from_matrix(abc, base);
  for (const double k : {0.0, -1.0, std::nan(""), HUGE_VAL}) {
    CHECK_THROWS_WITH_AS((void)a.repeated(k), doctest::Contains("expected a finite value > 0"),
                         ParameterError);
  }
  const Information b = Information::from_matrix({{"d", 1.0}}, Eigen::MatrixXd::Identity(1, 1));
  CHECK_THROWS_WITH_AS((void)((a + GaussianPrior("a", 1.0)) + b).repeated(2.0),
                       doctest::Contains("the information holds a prior"), ParameterError);
}

TEST_CASE("Parts that do not belong together are refused") {
  Information::Parts parts;
  CHECK_THROWS_WITH_AS(Information{parts}, doctest::Contains("number of parameters: got 0"),
                       ParameterError);
  parts.parameters = abc;
  parts.root = whet::RootInformation(2);
  CHECK_THROWS_WITH_AS(Information{parts},
                       doctest::Contains("got 2 parameters and 0 shifts, expected 3 and 0"),
                       ParameterError);
}

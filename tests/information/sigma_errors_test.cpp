#include <whet/information/sigma_errors.hpp>

#include <algorithm>
#include <cmath>
#include <limits>
#include <string>
#include <vector>

#include <doctest/doctest.h>
#include <Eigen/QR>

#include <whet/forecasts/forecast.hpp>
#include <whet/information/information.hpp>

#include <information/random_problems.hpp>
#include <support/close_to.hpp>

using whet::ErrorSources;
using whet::Forecast;
using whet::Information;
using whet::test::close_to;
using whet::test::Draws;
using whet::test::information_of;
using whet::test::named;
using whet::test::true_sigmas;

namespace {

enum class Push { anywhere, one_sigma, aligned, largest };

/// Exact rows W, and what a forecast is given: W + E with |E_p| <= sizes(p).
struct Problem {
  Eigen::MatrixXd exact, given;
  Eigen::VectorXd sizes;
};

/// @param eta   what the errors add up to, sum_p e_p sigma_p
/// @param push  the direction of the errors
Problem draw(Draws& draws, double eta, Push push) {
  const Eigen::Index count = draws.integer(1, 8), n = count + draws.integer(0, 12);
  Eigen::MatrixXd rows = draws.normal(n, count);
  if (count > 1 && draws.uniform(0.0, 1.0) < 0.7) {  // a near degeneracy
    const double apart = draws.decades(-3.0, 0.0);
    rows.col(0) = rows.rightCols(count - 1).rowwise().sum() + apart * rows.col(0);
  }
  for (Eigen::Index p = 0; p < count; ++p) rows.col(p) *= draws.decades(-12.0, 12.0);
  // Errors are added to the rows that are given, so that eta, which is known, is of those.
  const Eigen::HouseholderQR<Eigen::MatrixXd> qr(rows);
  const Eigen::MatrixXd q = qr.householderQ() * Eigen::MatrixXd::Identity(n, count);
  const Eigen::MatrixXd half = qr.matrixQR().topRows(count).triangularView<Eigen::Upper>().solve(
      Eigen::MatrixXd::Identity(count, count));
  const Eigen::VectorXd sigmas = half.rowwise().norm();
  Eigen::VectorXd shares(count);
  for (Eigen::Index p = 0; p < count; ++p) shares(p) = draws.decades(-3.0, 0.0);
  shares *= eta / shares.sum();
  Problem problem{rows, rows, shares.cwiseQuotient(sigmas)};
  const Eigen::Index target = draws.integer(0, static_cast<int>(count) - 1);
  const double sign = draws.uniform(0.0, 1.0) < 0.5 ? -1.0 : 1.0;
  const Eigen::VectorXd common = draws.normal(n, 1);
  for (Eigen::Index p = 0; p < count; ++p) {
    Eigen::VectorXd error = draws.normal(n, 1);
    const Eigen::VectorXd along = q * half.row(target).transpose();  // W C e_a
    const double part = half.row(p).dot(half.row(target));           // C_pa
    if (push == Push::one_sigma) error = (part < 0.0 ? -sign : sign) * along;
    if (push == Push::aligned) error = (part < 0.0 ? -sign : sign) * common;
    if (push == Push::largest) {  // towards the least eigenvalue of what is left
      error = -(part < 0.0 ? -1.0 : 1.0) * (along + 0.3 * along.norm() / common.norm() * common);
    }
    const double length = push == Push::anywhere ? draws.uniform(0.0, 1.0) : 1.0;
    problem.exact.col(p) += length * problem.sizes(p) / error.norm() * error;
  }
  problem.sizes *= 1.0 + 1e-14;
  return problem;
}

}  // namespace

TEST_CASE("No sigma is further off than stated, whatever the errors of the derivatives") {
  Draws draws(20260101);
  std::vector<double> ratios;
  double worst = 0.0;
  for (int trial = 0; trial < 2000; ++trial) {
    const auto push = static_cast<Push>(trial % 4);
    const double eta = trial % 3 == 0 ? draws.decades(-6.0, -2.0) : draws.uniform(0.01, 0.9);
    const Problem problem = draw(draws, eta, push);
    const whet::Parameters parameters = named(problem.given.cols());
    const Forecast forecast(information_of(parameters, problem.given, problem.sizes));
    const Eigen::VectorXd truth = true_sigmas(problem.exact);
    REQUIRE(forecast.unconstrained_directions().empty());
    for (Eigen::Index a = 0; a < truth.size(); ++a) {
      const std::string& name = parameters[a].name;
      const double off = std::abs(forecast.sigma(name) - truth(a));
      const double stated = forecast.numerical_error(name);
      INFO("trial ", trial, ", eta ", eta, ", ", name);
      CHECK(off <= stated * (1.0 + 1e-12));
      CHECK(std::isfinite(stated));
      worst = std::max(worst, off / stated);
      if (eta < 0.01) {
        // By the formula itself, sum_p e_p |C_pa|.
        double first = 0.0;
        for (Eigen::Index p = 0; p < truth.size(); ++p) {
          first += problem.sizes(p) * std::abs(forecast.covariance(parameters[p].name, name));
        }
        ratios.push_back(stated / first);
      }
    }
  }
  std::sort(ratios.begin(), ratios.end());
  MESSAGE("stated over first order for eta < 0.01: median ", ratios[ratios.size() / 2],
          "; largest part of a stated error that was used: ", worst);
  CHECK(ratios[ratios.size() / 2] < 1.1);
  CHECK(worst > 0.5);  // the adversary is one
}

TEST_CASE("The stated error is the same in whatever order a forecast is made") {
  Draws draws(20260102);
  for (int trial = 0; trial < 200; ++trial) {
    const Eigen::Index count = draws.integer(4, 7);
    const double eta = draws.uniform(0.001, 0.6);
    const auto rows = [&](double scale) -> Eigen::MatrixXd {
      return scale * draws.normal(count + 6, count);
    };
    const whet::Parameters all = named(count);
    const Eigen::MatrixXd first = rows(1.0), second = rows(0.7);
    Eigen::MatrixXd both(2 * (count + 6), count);
    both << first, second;
    const Eigen::VectorXd sigmas = true_sigmas(both);
    const Eigen::VectorXd sizes = 0.5 * eta / static_cast<double>(count) * sigmas.cwiseInverse();
    const Information a = information_of(all, first, sizes), b = information_of(all, second, sizes);
    const Information joint = a + b;
    const Forecast whole(joint), swapped(b + a), out(joint.integrating_out({"p0", "p2"}));
    const Forecast one_by_one(joint.integrating_out({"p2"}).integrating_out({"p0"}));
    const auto scaled = whet::exact([](const auto& at) { return std::vector{0.5 * at["q"]}; });
    const Forecast there(
        joint.replacing({"p1"}, {{"q", 2.0}}, scaled).integrating_out({"p0", "p2"}));
    // Held on both sides and joined, or joined and held.
    const Forecast held(joint.holding({"p1"})), before(a.holding({"p1"}) + b.holding({"p1"}));
    for (const std::string name : {"p1", "p3"}) {
      INFO("trial ", trial, ", eta ", eta, ", ", name);
      const double stated = whole.numerical_error(name);
      CHECK(swapped.numerical_error(name) == close_to(stated, 1e-9));
      CHECK(out.numerical_error(name) == close_to(stated, 1e-9));
      CHECK(one_by_one.numerical_error(name) == close_to(stated, 1e-9));
      const std::string after = name == "p1" ? "q" : name;
      const double unit = name == "p1" ? 2.0 : 1.0;
      CHECK(there.numerical_error(after) == close_to(unit * stated, 1e-9));
    }
    CHECK(before.numerical_error("p3") == close_to(held.numerical_error("p3"), 1e-9));
  }
}

TEST_CASE("The stated error holds for probes joined of every kind, after integrating out too") {
  // Rows with errors, a printed matrix, and a prior, on parameters that they share in part.
  Draws draws(20260103);
  int bounded = 0;
  for (int trial = 0; trial < 1000; ++trial) {
    const Eigen::Index count = draws.integer(2, 6);
    const Problem problem = [&] {
      Problem drawn = draw(draws, draws.uniform(0.001, 0.6), static_cast<Push>(trial % 4));
      while (drawn.given.cols() != count) {
        drawn = draw(draws, draws.uniform(0.001, 0.6), static_cast<Push>(trial % 4));
      }
      return drawn;
    }();
    const Eigen::VectorXd sigmas = true_sigmas(problem.exact);
    // Another probe, of which a matrix was printed to three digits.
    const Eigen::MatrixXd rows = draws.normal(count + 2, count) * draws.decades(-1.0, 1.0) *
                                 sigmas.cwiseInverse().asDiagonal();
    Eigen::MatrixXd printed = rows.transpose() * rows;
    for (Eigen::Index j = 0; j < count; ++j) {
      for (Eigen::Index i = 0; i <= j; ++i) {
        const double unit = std::pow(10.0, std::floor(std::log10(std::abs(printed(i, j)))) - 2.0);
        printed(i, j) = printed(j, i) = std::round(printed(i, j) / unit) * unit;
      }
    }
    const double prior = draws.decades(-2.0, 2.0) * sigmas(0);
    const whet::Parameters parameters = named(count);
    const Information joint = information_of(parameters, problem.given, problem.sizes) +
                              Information::from_matrix(parameters, printed, {.digits = 3}) +
                              whet::GaussianPrior("p0", prior);
    whet::test::LongMatrix all(problem.exact.rows() + rows.rows() + 1, count);
    all.setZero();
    all.topRows(problem.exact.rows()) = problem.exact.cast<long double>();
    all.middleRows(problem.exact.rows(), rows.rows()) = rows.cast<long double>();
    all(all.rows() - 1, 0) = 1.0L / static_cast<long double>(prior);
    const Eigen::VectorXd truth = true_sigmas(all);
    const Forecast whole(joint), out(joint.integrating_out({"p0"}));
    if (!whole.unconstrained_directions().empty()) continue;  // see null_space_test.cpp
    for (Eigen::Index p = 0; p < count; ++p) {
      const std::string& name = parameters[p].name;
      INFO("trial ", trial, ", ", name);
      CHECK(std::abs(whole.sigma(name) - truth(p)) <= whole.numerical_error(name));
      if (!std::isfinite(whole.numerical_error(name))) continue;
      ++bounded;
      if (p > 0) CHECK(std::abs(out.sigma(name) - truth(p)) <= out.numerical_error(name));
    }
  }
  CHECK(bounded > 2500);
}

TEST_CASE("Integrating a badly known nuisance out does not hide what its errors can do") {
  // The nuisance is at a right angle to p0 as given, and 42 degrees off in truth: to first order
  // p0 does not hear of it.
  const Information information =
      information_of(named(2), Eigen::MatrixXd::Identity(2, 2), Eigen::Vector2d(0.0, 0.901));
  const double truth = std::sqrt(1.81);  // columns (1, 0) and (0.9, 1), by hand
  for (const Forecast& forecast :
       {Forecast(information), Forecast(information.integrating_out({"p1"}))}) {
    CHECK(forecast.sigma("p0") == close_to(1.0, 1e-14));
    CHECK(std::abs(forecast.sigma("p0") - truth) <= forecast.numerical_error("p0"));
  }
}

TEST_CASE("Errors that exceed what the rows resolve leave no bound, and the notes say whose") {
  // Two columns 0.1 apart, each 0.09 off: no direction is below the errors of its own, but
  // together they are.
  const Eigen::MatrixXd rows{{1.0, 1.0}, {0.05, -0.05}};
  const Forecast forecast(information_of(named(2), rows, Eigen::Vector2d(0.04, 0.0599)));
  REQUIRE(forecast.unconstrained_directions().empty());
  CHECK(forecast.numerical_error("p0") == std::numeric_limits<double>::infinity());
  REQUIRE(forecast.notes().size() == 1);
  CHECK(forecast.notes()[0].find("no bound on the numerical errors") != std::string::npos);
  CHECK(forecast.notes()[0].find("\"p1\"") != std::string::npos);
}

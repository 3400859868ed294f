#include <whet/information/null_space.hpp>

#include <cmath>
#include <limits>
#include <string>
#include <vector>

#include <doctest/doctest.h>
#include <Eigen/QR>

#include <whet/assembly/expected_information.hpp>
#include <whet/covariances/diagonal_covariance.hpp>
#include <whet/forecasts/forecast.hpp>
#include <whet/information/information.hpp>
#include <whet/likelihoods/gaussian_likelihood.hpp>

#include <information/random_problems.hpp>
#include <support/close_to.hpp>

using whet::Forecast;
using whet::Information;
using whet::test::close_to;
using whet::test::Draws;
using whet::test::information_of;
using whet::test::named;
using whet::test::true_sigmas;

namespace {

/// Rows that leave some directions exactly unmeasured, and what a forecast is given of them.
struct Degenerate {
  Eigen::MatrixXd given;
  Eigen::VectorXd sizes;
  std::vector<Eigen::Index> twins;  ///< parameters with a part in a null direction
  Eigen::MatrixXd measured;         ///< exact rows of the other parameters and what fixes the rest
  std::vector<Eigen::Index> others;
  Eigen::Index directions = 0;
};

/// @param error  of each column relative to its length
Degenerate draw(Draws& draws, double error) {
  const Eigen::Index measured = draws.integer(1, 3), sums = draws.integer(1, 2);
  const Eigen::Index zeros = draws.integer(0, 1), pure = error > 0.0 ? draws.integer(0, 1) : 0;
  const Eigen::Index n = 12 + draws.integer(0, 20);
  std::vector<Eigen::VectorXd> columns;
  Degenerate problem;
  const Eigen::MatrixXd basis = draws.normal(n, measured + 2 * sums);
  for (Eigen::Index p = 0; p < measured; ++p) {
    problem.others.push_back(static_cast<Eigen::Index>(columns.size()));
    columns.push_back(basis.col(p));
  }
  Eigen::Index used = measured;
  for (Eigen::Index s = 0; s < sums; ++s) {  // two twins, or three parameters in one plane
    const bool plane = draws.integer(0, 1) == 1;
    const auto first = static_cast<Eigen::Index>(columns.size());
    columns.push_back(basis.col(used));
    if (plane) columns.push_back(basis.col(used + 1));
    const double a = draws.uniform(0.3, 2.0), b = plane ? draws.uniform(0.3, 2.0) : 0.0;
    columns.push_back(a * basis.col(used) + b * basis.col(used + 1));
    for (auto p = first; p < static_cast<Eigen::Index>(columns.size()); ++p) {
      problem.twins.push_back(p);
    }
    used += 2;
  }
  problem.directions = sums + zeros + pure;
  const auto core = static_cast<Eigen::Index>(columns.size());
  const Eigen::Index count = core + zeros + pure;
  Eigen::MatrixXd exact = Eigen::MatrixXd::Zero(n, count);
  for (Eigen::Index p = 0; p < core; ++p) exact.col(p) = columns[static_cast<std::size_t>(p)];
  for (Eigen::Index p = core; p < count; ++p) problem.twins.push_back(p);
  // Of what is measured: the others, and an independent set of the rest, by a pivoted QR.
  Eigen::MatrixXd rest = exact.middleCols(measured, core - measured);
  Eigen::ColPivHouseholderQR<Eigen::MatrixXd> qr(rest);
  qr.setThreshold(1e-9);
  problem.measured.resize(n, measured + qr.rank());
  problem.measured.leftCols(measured) = exact.leftCols(measured);
  for (Eigen::Index k = 0; k < qr.rank(); ++k) {
    problem.measured.col(measured + k) = rest.col(qr.colsPermutation().indices()(k));
  }
  problem.given = exact;
  problem.sizes = 2e-15 * exact.colwise().norm().transpose();
  for (Eigen::Index p = 0; p < count; ++p) {
    if (error == 0.0 || (p >= core && p < core + zeros)) continue;
    const double length = p < core ? exact.col(p).norm() : 1.0;
    const Eigen::VectorXd off = draws.normal(n, 1);
    problem.given.col(p) += 0.99 * error * length / off.norm() * off;
    problem.sizes(p) += error * length;
  }
  return problem;
}

void change_units(Eigen::MatrixXd& rows, Eigen::VectorXd& sizes, const Eigen::VectorXd& units) {
  rows = rows * units.asDiagonal();
  sizes = sizes.cwiseProduct(units);
}

}  // namespace

TEST_CASE("What is not measured is found, and what is keeps its sigma within the stated error") {
  Draws draws(20260201);
  for (int trial = 0; trial < 2000; ++trial) {
    const double error = trial % 2 == 0 ? 0.0 : draws.decades(-12.0, -3.0);
    Degenerate problem = draw(draws, error);
    const Eigen::Index count = problem.given.cols();
    const Eigen::VectorXd truth = true_sigmas(problem.measured);
    Eigen::VectorXd units(count);
    for (Eigen::Index p = 0; p < count; ++p) units(p) = draws.decades(-12.0, 12.0);
    const whet::Parameters parameters = named(count);
    const Forecast plain(information_of(parameters, problem.given, problem.sizes));
    change_units(problem.given, problem.sizes, units);
    const Information information = information_of(parameters, problem.given, problem.sizes);
    const Forecast forecast(information);
    INFO("trial ", trial, ", error ", error);
    CHECK(forecast.unconstrained_directions().size() ==
          static_cast<std::size_t>(problem.directions));
    CHECK(plain.unconstrained_directions().size() == static_cast<std::size_t>(problem.directions));
    for (const Eigen::Index p : problem.twins) {
      INFO(parameters[p].name);
      CHECK(std::isinf(forecast.sigma(parameters[p].name)));
      CHECK(std::isinf(plain.sigma(parameters[p].name)));
    }
    for (std::size_t k = 0; k < problem.others.size(); ++k) {
      const Eigen::Index p = problem.others[k];
      const std::string& name = parameters[p].name;
      INFO(name);
      const double wanted = truth(static_cast<Eigen::Index>(k));
      CHECK(std::abs(units(p) * forecast.sigma(name) - wanted) <=
            units(p) * forecast.numerical_error(name));
      CHECK(std::abs(plain.sigma(name) - wanted) <= plain.numerical_error(name));
      CHECK(forecast.numerical_error(name) <=
            20.0 * (error + 1e-13) * forecast.sigma(name) * static_cast<double>(count));
    }
    // With one of the twins integrated out, the other is still unmeasured.
    const std::string twin = parameters[problem.twins[0]].name;
    const Forecast without(information.integrating_out({twin}));
    CHECK(std::isinf(without.sigma(parameters[problem.twins[1]].name)));
    for (std::size_t k = 0; k < problem.others.size(); ++k) {
      const Eigen::Index p = problem.others[k];
      const std::string& name = parameters[p].name;
      CHECK(std::abs(units(p) * without.sigma(name) - truth(static_cast<Eigen::Index>(k))) <=
            units(p) * without.numerical_error(name));
    }
  }
}

TEST_CASE("All twins integrated out at once take nothing from the others") {
  Draws draws(20260202);
  for (int trial = 0; trial < 200; ++trial) {
    const Degenerate problem = draw(draws, trial % 2 == 0 ? 0.0 : 1e-7);
    const whet::Parameters parameters = named(problem.given.cols());
    std::vector<std::string> twins;
    for (const Eigen::Index p : problem.twins) twins.push_back(parameters[p].name);
    const Eigen::VectorXd truth = true_sigmas(problem.measured);
    const Forecast forecast(
        information_of(parameters, problem.given, problem.sizes).integrating_out(twins));
    for (std::size_t k = 0; k < problem.others.size(); ++k) {
      const std::string& name = parameters[problem.others[k]].name;
      CHECK(std::abs(forecast.sigma(name) - truth(static_cast<Eigen::Index>(k))) <=
            forecast.numerical_error(name));
    }
  }
}

TEST_CASE("Nothing is called unmeasured where nothing is degenerate") {
  Draws draws(20260203);
  for (int trial = 0; trial < 1000; ++trial) {
    const Eigen::Index count = draws.integer(2, 8), n = count + draws.integer(0, 10);
    // Singular values from 1 down to 1e-8 at most.
    const double condition = draws.decades(0.0, 8.0);
    const auto orthonormal = [&](Eigen::Index rows) -> Eigen::MatrixXd {
      const Eigen::HouseholderQR<Eigen::MatrixXd> qr(draws.normal(rows, count));
      return qr.householderQ() * Eigen::MatrixXd::Identity(rows, count);
    };
    Eigen::VectorXd values(count);
    for (Eigen::Index k = 0; k < count; ++k) {
      values(k) = std::pow(condition, -static_cast<double>(k) / static_cast<double>(count - 1));
    }
    const Eigen::MatrixXd rows =
        orthonormal(n) * values.asDiagonal() * orthonormal(count).transpose();
    Eigen::VectorXd units(count);
    for (Eigen::Index p = 0; p < count; ++p) units(p) = draws.decades(-12.0, 12.0);
    // Exact columns; or errors that leave the least singular value a factor.
    Eigen::VectorXd sizes = 2e-15 * rows.colwise().norm().transpose();
    const bool exact = trial % 2 == 0;
    if (!exact) {
      sizes.array() += 0.3 / (condition * std::sqrt(static_cast<double>(count)));
    }
    const Eigen::VectorXd truth = true_sigmas(rows);
    Eigen::MatrixXd given = rows;
    change_units(given, sizes, units);
    const whet::Parameters parameters = named(count);
    const Forecast forecast(information_of(parameters, given, sizes));
    INFO("trial ", trial, ", condition ", condition);
    CHECK(forecast.unconstrained_directions().empty());
    for (Eigen::Index p = 0; p < count; ++p) {
      const double off = std::abs(units(p) * forecast.sigma(parameters[p].name) - truth(p));
      CHECK(off <= units(p) * forecast.numerical_error(parameters[p].name));
      if (exact) CHECK(off <= 1e-13 * condition * truth(p));
    }
  }
}

TEST_CASE("The least direction of a Kahan matrix is found, where its last pivot sees nothing") {
  // Kahan (1966): R_ii = s^i, R_ij = -c s^i; condition far beyond its diagonal.
  const Eigen::Index n = 50;
  const double angle = 1.2, s = std::sin(angle), c = std::cos(angle);
  Eigen::MatrixXd kahan = Eigen::MatrixXd::Identity(n, n);
  for (Eigen::Index i = 0; i < n; ++i) {
    for (Eigen::Index j = i + 1; j < n; ++j) kahan(i, j) = -c;
    kahan.row(i) *= std::pow(s, static_cast<double>(i));
  }
  const Eigen::VectorXd v = whet::detail::least_direction<double>(kahan).col(0);
  const Eigen::MatrixXd inverse =
      kahan.triangularView<Eigen::Upper>().solve(Eigen::MatrixXd::Identity(n, n));
  CHECK((kahan * v).norm() <= 2.0 / inverse.norm() * std::sqrt(static_cast<double>(n)));
  CHECK((kahan * v).norm() < 1e-3 * kahan(n - 1, n - 1));
}

TEST_CASE("A parameter that nothing measures is one direction, and a prior measures it") {
  const Eigen::MatrixXd rows{{1.0, 0.0}, {2.0, 0.0}};
  const Information information = information_of(named(2), rows);
  const Forecast forecast(information);
  CHECK(forecast.sigma("p0") == close_to(1.0 / std::sqrt(5.0), 1e-14));
  CHECK(std::isinf(forecast.sigma("p1")));
  CHECK(forecast.numerical_error("p1") == 0.0);
  const Forecast known(information + whet::GaussianPrior("p1", 3.0));
  CHECK(known.sigma("p1") == close_to(3.0, 1e-14));
  CHECK(known.unconstrained_directions().empty());
}

TEST_CASE("A part in a null direction that is small but real is not overlooked") {
  // p1 moves a millionth of what p0 moves, and all of it along p0 - p2.
  const Eigen::MatrixXd rows{{1.0, 0.0, 1.0}, {0.0, 1.0, 1e-6}};
  const Forecast forecast(information_of(named(3), rows));
  CHECK(forecast.unconstrained_directions().size() == 1);
  for (const std::string name : {"p0", "p1", "p2"}) CHECK(std::isinf(forecast.sigma(name)));
}

TEST_CASE("A column that holds nothing but independent noise is not measured, however long it is") {
  // Each element is noise of one size; together they are sqrt(n) times that.
  Draws draws(20260204);
  for (const Eigen::Index n : {30, 400, 4000}) {
    Eigen::MatrixXd values(n, 2);
    values << Eigen::VectorXd::LinSpaced(n, -1.0, 1.0), 1e-4 * draws.normal(n, 1);
    Eigen::MatrixXd noise = Eigen::MatrixXd::Constant(n, 2, 4e-4);
    whet::Derivatives::Parts parts{
        .parameters = named(2), .mean = Eigen::VectorXd::Zero(n), .values = values, .noise = noise};
    parts.reports.resize(2);
    for (auto& report : parts.reports) report.independent_noise = true;
    const auto information = whet::expected_information(
        named(2), whet::GaussianLikelihood(whet::Derivatives(parts),
                                           whet::DiagonalCovariance::uniform(n, 1.0)));
    const Forecast forecast(information);
    CHECK(std::isinf(forecast.sigma("p1")));
    const double truth = 1.0 / values.col(0).norm();
    CHECK(forecast.sigma("p0") == close_to(truth, 1e-2));
    // All that is known of p1 is noise: for all one knows it could do what p0 does.
    CHECK(std::isinf(forecast.numerical_error("p0")));
    // A prior on it bounds what it can do.
    const Forecast held(information + whet::GaussianPrior("p1", 1.0));
    CHECK(std::abs(held.sigma("p0") - truth) <= held.numerical_error("p0"));
    CHECK(held.numerical_error("p0") <= 1e-2 * truth);
  }
}

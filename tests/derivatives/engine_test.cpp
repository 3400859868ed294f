#include <whet/derivatives/engine.hpp>

#include <cmath>
#include <limits>
#include <stdexcept>

#include <doctest/doctest.h>

#include <derivatives/random_functions.hpp>
#include <support/close_to.hpp>

using whet::Derivatives;
using whet::DerivativeStatus;
using whet::Parameters;
using whet::Point;
using whet::detail::ColumnError;
using whet::detail::DerivativeEngine;
using whet::test::close_to;

namespace {

/// Data of a standard deviation each, independent.
struct Noise {
  double sigma;
  [[nodiscard]] double length(const Eigen::VectorXd& data) const { return data.norm() / sigma; }
  [[nodiscard]] double size(const ColumnError& e) const {
    const double noise = e.independent_noise ? e.noise.maxCoeff() : e.noise.norm();
    return (e.truncation.norm() + noise) / sigma;
  }
};

/// Drive an engine until nothing is left to do; `rounds` gets the size of each batch.
template <class F>
Derivatives driven(const Parameters& parameters, const F& f, const Noise& noise, double goal,
                   std::vector<std::size_t>* rounds = nullptr) {
  const auto length = [&](const Eigen::VectorXd& data) { return noise.length(data); };
  const auto size = [&](const ColumnError& e) { return noise.size(e); };
  DerivativeEngine engine(parameters, f(Point<double>(parameters)), {},
                          {.length = length, .size = size, .in_noise_units = true},
                          {.first_rungs = 2});
  Eigen::VectorXd goals =
      Eigen::VectorXd::Constant(parameters.size(), std::numeric_limits<double>::infinity());
  for (;;) {
    const auto batch = engine.next(goals);
    if (batch.empty()) return engine.derivatives();
    if (rounds != nullptr) rounds->push_back(batch.size());
    engine.tell(whet::detail::evaluate_serially(f, batch));
    for (Eigen::Index p = 0; p < parameters.size(); ++p) goals(p) = goal * engine.column_size(p);
  }
}

}  // namespace

TEST_CASE("The first round asks for all parameters at once, later ones for those that need it") {
  const Parameters parameters{{"easy", 1.0}, {"hard", 2.0}};
  const auto f = [](const Point<double>& at) -> Eigen::VectorXd {
    return Eigen::VectorXd{{at["easy"], std::sin(3 * at["hard"])}};
  };
  std::vector<std::size_t> rounds;
  const Derivatives d = driven(parameters, f, {1.0}, 1e-6, &rounds);
  CHECK(rounds.front() == 8);
  CHECK(rounds.size() >= 2);
  CHECK(d.reports()[0].evaluations == 4);
  CHECK(d.values()(1, 1) == close_to(3 * std::cos(6.0), 1e-6));
  CHECK(d.rounds() == static_cast<int>(rounds.size()) + 1);
  CHECK(d.evaluations() == d.reports()[0].evaluations + d.reports()[1].evaluations + 1);
}

TEST_CASE("A goal of infinity leaves a column as its first round gave it, a lower one reopens it") {
  const Parameters parameters{{"a", 1.0}};
  const auto f = [](const Point<double>& at) -> Eigen::VectorXd {
    return Eigen::VectorXd::Constant(1, std::exp(at["a"]));
  };
  const auto length = [](const Eigen::VectorXd& data) { return data.norm(); };
  const auto size = [](const ColumnError& e) { return e.truncation.norm() + e.noise.norm(); };
  DerivativeEngine engine(parameters, f(Point<double>(parameters)), {},
                          {.length = length, .size = size}, {.first_rungs = 2});
  const Eigen::VectorXd leave =
      Eigen::VectorXd::Constant(1, std::numeric_limits<double>::infinity());
  engine.tell(whet::detail::evaluate_serially(f, engine.next(leave)));
  CHECK(engine.next(leave).empty());
  const double first = engine.error_size(0);
  CHECK(engine.can_improve(0));
  const Eigen::VectorXd lower = Eigen::VectorXd::Constant(1, 0.01 * first);
  engine.tell(whet::detail::evaluate_serially(f, engine.next(lower)));
  CHECK(engine.error_size(0) < first);
}

TEST_CASE("A step that moves the data by many standard deviations is taken back") {
  // The scale is 1000 times too large for this noise: the signal saturates within a step.
  const Parameters parameters{{.name = "a", .fiducial = 1.0, .scale = 10.0}};
  const auto f = [](const Point<double>& at) -> Eigen::VectorXd {
    return Eigen::VectorXd{{std::tanh(5 * (at["a"] - 1)), std::exp(at["a"])}};
  };
  const Derivatives d = driven(parameters, f, {0.1}, 1e-2);
  CHECK(d.values()(0, 0) == close_to(5.0, 1e-2));
  CHECK(std::abs(d.values()(0, 0) - 5.0) <= d.errors()(0, 0));
}

TEST_CASE("Two equal columns of rounded output agree, and claim no less than they differ") {
  const Parameters parameters{{"inner", 1.3}, {"outer", 0.9}, {"bend", 0.4}};
  const auto f = [](const Point<double>& at) -> Eigen::VectorXd {
    Eigen::VectorXd data(40);
    for (Eigen::Index i = 0; i < 40; ++i) {
      const double x = 0.1 * static_cast<double>(i + 1);
      data(i) =
          whet::test::printed((at["inner"] + at["outer"]) * x + std::exp(-at["bend"] * x * x), 9);
    }
    return data;
  };
  const Derivatives d = driven(parameters, f, {0.01}, 1e-9);
  for (Eigen::Index i = 0; i < 40; ++i) {
    const double x = 0.1 * static_cast<double>(i + 1);
    const Eigen::RowVector3d exact(x, x, -x * x * std::exp(-0.4 * x * x));
    for (Eigen::Index p = 0; p < 3; ++p) {
      CHECK(std::abs(d.values()(i, p) - exact(p)) <= d.errors()(i, p));
    }
  }
  CHECK(d.errors().maxCoeff() < 1e-5);
  for (const auto& report : d.reports()) CHECK(report.status == DerivativeStatus::rounded);
}

TEST_CASE("A coherent jitter of each call is not taken for independent noise") {
  const Parameters parameters{{"a", 1.0}};
  const auto noisy = [](bool coherent) {
    return [coherent](const Point<double>& at) -> Eigen::VectorXd {
      Eigen::VectorXd data(100);
      for (Eigen::Index i = 0; i < 100; ++i) {
        const double u = whet::test::hash_noise(at["a"], coherent ? 0 : static_cast<unsigned>(i));
        data(i) = std::exp(-0.02 * at["a"] * static_cast<double>(i)) * (1 + 1e-6 * u);
      }
      return data;
    };
  };
  CHECK(driven(parameters, noisy(false), {0.01}, 1e-9).reports()[0].independent_noise);
  CHECK(!driven(parameters, noisy(true), {0.01}, 1e-9).reports()[0].independent_noise);
}

TEST_CASE("Ten thousand elements are differentiated like one") {
  const Parameters parameters{{"a", 0.5}};
  const auto f = [](const Point<double>& at) -> Eigen::VectorXd {
    return Eigen::VectorXd::LinSpaced(10000, 0.1, 3.0).unaryExpr([&](double x) {
      return std::sin(x * at["a"]);
    });
  };
  const Derivatives d = driven(parameters, f, {0.01}, 1e-6);
  const Eigen::VectorXd x = Eigen::VectorXd::LinSpaced(10000, 0.1, 3.0);
  const Eigen::VectorXd exact = (x.array() * (0.5 * x.array()).cos()).matrix();
  const Eigen::VectorXd off = (d.values().col(0) - exact).cwiseAbs();
  CHECK((off.array() <= d.errors().col(0).array()).all());
  CHECK(off.norm() <= 1e-6 * exact.norm());
}

// What the compile-time row compiles of ours: a first forecast, as a user would write it.
#include <cmath>
#include <iostream>
#include <vector>

#include <whet/whet.hpp>

int main() {
  const whet::Parameters parameters{{"amplitude", 2.0}, {"rate", 0.5}};

  std::vector<double> times;
  for (int i = 0; i <= 40; ++i) times.push_back(0.25 * i);

  const auto signal = [&times](const auto& at) {
    using std::exp;
    const auto amplitude = at["amplitude"];
    const auto rate = at["rate"];
    return whet::tabulate(times, [&](double t) { return amplitude * exp(-rate * t); });
  };
  const auto noise =
      whet::DiagonalCovariance::from_standard_deviations(std::vector<double>(times.size(), 0.05));

  const whet::Information information =
      whet::expected_information(parameters, whet::GaussianLikelihood(whet::exact(signal), noise));
  const whet::Forecast forecast(information);
  const whet::Ellipse ellipse =
      forecast.ellipse("amplitude", "rate", whet::Confidence::probability(0.6827));

  std::cout << information.matrix()(0, 1) << ' ' << forecast.sigma("rate") << ' '
            << forecast.conditional_sigma("rate") << ' '
            << forecast.correlation("amplitude", "rate") << ' ' << forecast.numerical_error("rate")
            << ' ' << ellipse.area() << '\n'
            << forecast << '\n';
}

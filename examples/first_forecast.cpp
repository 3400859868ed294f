// A first forecast: the program of README.md.

#include <cmath>
#include <iostream>
#include <vector>

#include <whet/whet.hpp>

int main() {
  const whet::Parameters parameters{
      {"amplitude", 2.1}, {"slope", -1.4}, {.name = "background", .fiducial = 0.3, .lower = 0.0}};
  // Your theory code: called with a point, it returns the data vector.
  const auto spectrum = [](const whet::Point<double>& at) {
    std::vector<double> power;
    for (int i = 1; i <= 20; ++i) {
      power.push_back(at["amplitude"] * std::pow(0.1 * i, at["slope"]) + at["background"]);
    }
    return power;
  };
  const auto noise = whet::DiagonalCovariance::uniform(20, 0.05);
  const whet::Information sandpiper = whet::expected_information(
      parameters, whet::GaussianLikelihood(spectrum, noise), {.name = "Sandpiper"});
  std::cout << whet::Forecast(sandpiper) << '\n'
            << whet::Forecast(sandpiper + whet::GaussianPrior("background", 0.02));
}

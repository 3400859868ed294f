// A program of somebody else, which the consumer tests build by every way to get at whet.
#include <cmath>
#include <iostream>

#include <whet/whet.hpp>

int main() {
  const whet::Parameters parameters{{"amplitude", 2.0}, {"rate", 0.5}};
  const auto readings = [](const auto& at) {
    return std::vector{at["amplitude"], at["amplitude"] * at["rate"]};
  };
  const whet::Forecast forecast(whet::expected_information(
      parameters,
      whet::GaussianLikelihood(whet::exact(readings), whet::DiagonalCovariance::uniform(2, 0.5))));
  std::cout << "consumed " << parameters.size() << " parameters\n";
  return std::abs(forecast.sigma("amplitude") - 0.5) < 1e-12 ? 0 : 1;
}

// A program of somebody else, which the consumer tests build by every way to get at whet.
#include <iostream>

#include <whet/whet.hpp>

int main() {
  const whet::Parameters parameters{{"amplitude", 2.0}};
  const auto reading = [](const auto& at) { return std::vector{at["amplitude"]}; };
  const whet::Forecast forecast(whet::expected_information(
      parameters,
      whet::GaussianLikelihood(whet::exact(reading), whet::DiagonalCovariance::uniform(1, 0.5))));
  std::cout << "consumed " << parameters.size() << " parameters\n";
  return forecast.sigma("amplitude") == 0.5 ? 0 : 1;
}

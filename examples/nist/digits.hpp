#pragma once
/// How many digits of a set a forecast reaches, and whether its numerical error tells the truth.

#include <algorithm>
#include <cmath>
#include <string>

#include <whet/assembly/expected_information.hpp>
#include <whet/covariances/diagonal_covariance.hpp>
#include <whet/forecasts/forecast.hpp>
#include <whet/likelihoods/gaussian_likelihood.hpp>
#include <whet/observables/exact.hpp>

#include <nist/set.hpp>

namespace nist {

/// Decimal digits that two numbers share, 0 to 16: -log10 |got / wanted - 1|.
[[nodiscard]] inline double digits(double got, double wanted) {
  if (got == wanted) return 16.0;
  const double shared = -std::log10(std::abs(got / wanted - 1.0));
  return shared > 0.0 ? std::min(shared, 16.0) : 0.0;
}

/// How a forecast gets its derivatives.
enum class Derive { exactly, numerically };

/// The accuracy asked for of each sigma, where derivatives are numerical.
inline constexpr double accuracy = 1e-8;

/// The forecast for all readings of a set, with the certified values as the fiducial model.
[[nodiscard]] inline whet::Forecast forecast(const Set& set, Derive derive) {
  const Curve<> curve(set);
  const auto noise_of_all =
      whet::DiagonalCovariance::uniform(static_cast<Eigen::Index>(set.y.size()), noise(set));
  const auto from = [&](const auto& likelihood) {
    return whet::Forecast(
        whet::expected_information(parameters(set), likelihood, {.accuracy = accuracy}));
  };
  if (derive == Derive::exactly) {
    return from(whet::GaussianLikelihood(whet::exact(curve), noise_of_all));
  }
  return from(whet::GaussianLikelihood(curve, noise_of_all));
}

/// What a forecast of all readings of a set reaches, at its worst coefficient.
struct Reached {
  double certified{16.0};    ///< digits of the certified standard deviation (noise 1 without one)
  double reference{16.0};    ///< digits of unit_sd times the noise
  double stated_error{0.0};  ///< the largest numerical error, relative to sigma
  bool stated_holds{true};   ///< |sigma - unit_sd noise| <= numerical error, every coefficient
  bool all_measured{true};   ///< every sigma is finite
};

[[nodiscard]] inline Reached reached(const Set& set, const whet::Forecast& forecast) {
  Reached worst;
  const bool exact_fit = number(set.residual_standard_deviation) == 0.0;
  for (std::size_t i = 0; i < set.coefficients.size(); ++i) {
    const double sigma = forecast.sigma(set.coefficients[i]);
    const double stated = forecast.numerical_error(set.coefficients[i]);
    const double reference = number(set.unit_sd[i]) * noise(set);
    const double certified = exact_fit ? reference : number(set.standard_deviations[i]);
    worst.certified = std::min(worst.certified, digits(sigma, certified));
    worst.reference = std::min(worst.reference, digits(sigma, reference));
    worst.stated_error = std::max(worst.stated_error, stated / sigma);
    worst.stated_holds = worst.stated_holds && std::abs(sigma - reference) <= stated;
    worst.all_measured = worst.all_measured && std::isfinite(sigma);
  }
  return worst;
}

}  // namespace nist

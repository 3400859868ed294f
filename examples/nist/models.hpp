#pragma once
/// The models of the NIST Statistical Reference Datasets, each written once and generic in its
/// scalar: double, dual numbers for exact derivatives, or wide numbers for fifty digits.

#include <array>
#include <cmath>
#include <cstddef>
#include <string_view>
#include <vector>

namespace nist {

/// What a set is fitted with; several sets share a model.
enum class Model {
  proportional,
  polynomial,
  linear,
  power_law,
  shifted_power_law,
  exponential_saturation,
  inverse_square_saturation,
  inverse_root_saturation,
  hyperbolic_saturation,
  decay_over_line,
  three_decays,
  constant_and_two_decays,
  shifted_reciprocal,
  time_and_temperature,
  peak,
  two_peaks_on_decay,
  ratio_of_quadratics,
  ratio_without_constant,
  ratio_of_cubics,
  logistic,
  generalised_logistic,
  line_and_arctangent,
  three_cycles,
};

struct NamedModel {
  std::string_view set;
  Model model;
};

/// Every set and its model, in NIST's order of difficulty: nonlinear, then linear.
inline constexpr std::array<NamedModel, 38> models{{
    {"Misra1a", Model::exponential_saturation},
    {"Chwirut2", Model::decay_over_line},
    {"Chwirut1", Model::decay_over_line},
    {"Lanczos3", Model::three_decays},
    {"Gauss1", Model::two_peaks_on_decay},
    {"Gauss2", Model::two_peaks_on_decay},
    {"DanWood", Model::power_law},
    {"Misra1b", Model::inverse_square_saturation},
    {"Kirby2", Model::ratio_of_quadratics},
    {"Hahn1", Model::ratio_of_cubics},
    {"Nelson", Model::time_and_temperature},
    {"MGH17", Model::constant_and_two_decays},
    {"Lanczos1", Model::three_decays},
    {"Lanczos2", Model::three_decays},
    {"Gauss3", Model::two_peaks_on_decay},
    {"Misra1c", Model::inverse_root_saturation},
    {"Misra1d", Model::hyperbolic_saturation},
    {"Roszman1", Model::line_and_arctangent},
    {"ENSO", Model::three_cycles},
    {"MGH09", Model::ratio_without_constant},
    {"Thurber", Model::ratio_of_cubics},
    {"BoxBOD", Model::exponential_saturation},
    {"Rat42", Model::logistic},
    {"MGH10", Model::shifted_reciprocal},
    {"Eckerle4", Model::peak},
    {"Rat43", Model::generalised_logistic},
    {"Bennett5", Model::shifted_power_law},
    {"Norris", Model::polynomial},
    {"Pontius", Model::polynomial},
    {"NoInt1", Model::proportional},
    {"NoInt2", Model::proportional},
    {"Filip", Model::polynomial},
    {"Longley", Model::linear},
    {"Wampler1", Model::polynomial},
    {"Wampler2", Model::polynomial},
    {"Wampler3", Model::polynomial},
    {"Wampler4", Model::polynomial},
    {"Wampler5", Model::polynomial},
}};

/// The response that a model predicts at one row of predictors.
/// @param coefficients  in the order of the set; b(1) below is the first one
/// @param predictors    in the order of the set, of a type that mixes with Scalar
template <class Scalar, class Real>
[[nodiscard]] Scalar response(Model model, const std::vector<Scalar>& coefficients,
                              const std::vector<Real>& predictors) {
  using std::acos, std::atan, std::cos, std::exp, std::pow, std::sin, std::sqrt;
  const Real& x = predictors.front();
  const auto b = [&](std::size_t i) -> const Scalar& { return coefficients[i - 1]; };
  // b(first) + b(first + 1) x + ... + b(last) x^(last - first), by Horner's rule
  const auto polynomial = [&](std::size_t first, std::size_t last) {
    Scalar sum = b(last);
    for (std::size_t i = last; i-- > first;) sum = sum * x + b(i);
    return sum;
  };
  const auto bell = [&x](const Scalar& centre, const Scalar& width) {
    const Scalar t = (x - centre) / width;
    return Scalar(exp(-t * t));
  };
  const auto cycle = [&x](const Scalar& cosine, const Scalar& sine, const Scalar& period) {
    const Scalar phase = 2 * acos(Real(-1)) * x / period;
    return Scalar(cosine * cos(phase) + sine * sin(phase));
  };

  switch (model) {
    case Model::proportional:
      return b(1) * x;
    case Model::polynomial:
      return polynomial(1, coefficients.size());
    case Model::linear: {
      Scalar sum = b(1);
      for (std::size_t i = 0; i < predictors.size(); ++i) sum += b(i + 2) * predictors[i];
      return sum;
    }
    case Model::power_law:
      return b(1) * pow(x, b(2));
    case Model::shifted_power_law:
      return b(1) * pow(b(2) + x, -1 / b(3));
    case Model::exponential_saturation:
      return b(1) * (1 - exp(-b(2) * x));
    case Model::inverse_square_saturation: {
      const Scalar base = 1 + b(2) * x / 2;
      return b(1) * (1 - 1 / (base * base));
    }
    case Model::inverse_root_saturation:
      return b(1) * (1 - 1 / sqrt(1 + 2 * b(2) * x));
    case Model::hyperbolic_saturation:
      return b(1) * b(2) * x / (1 + b(2) * x);
    case Model::decay_over_line:
      return exp(-b(1) * x) / (b(2) + b(3) * x);
    case Model::three_decays:
      return b(1) * exp(-b(2) * x) + b(3) * exp(-b(4) * x) + b(5) * exp(-b(6) * x);
    case Model::constant_and_two_decays:
      return b(1) + b(2) * exp(-b(4) * x) + b(3) * exp(-b(5) * x);
    case Model::shifted_reciprocal:
      return b(1) * exp(b(2) / (x + b(3)));
    case Model::time_and_temperature:  // of ln(y)
      return b(1) - b(2) * predictors[0] * exp(-b(3) * predictors[1]);
    case Model::peak: {
      const Scalar t = (x - b(3)) / b(2);
      return b(1) / b(2) * exp(-t * t / 2);
    }
    case Model::two_peaks_on_decay:
      return b(1) * exp(-b(2) * x) + b(3) * bell(b(4), b(5)) + b(6) * bell(b(7), b(8));
    case Model::ratio_of_quadratics:
      return polynomial(1, 3) / (1 + x * polynomial(4, 5));
    case Model::ratio_without_constant:
      return b(1) * x * (x + b(2)) / (x * (x + b(3)) + b(4));
    case Model::ratio_of_cubics:
      return polynomial(1, 4) / (1 + x * polynomial(5, 7));
    case Model::logistic:
      return b(1) / (1 + exp(b(2) - b(3) * x));
    case Model::generalised_logistic:
      return b(1) / pow(1 + exp(b(2) - b(3) * x), 1 / b(4));
    case Model::line_and_arctangent:
      return b(1) - b(2) * x - atan(b(3) / (x - b(4))) / acos(Real(-1));
    case Model::three_cycles:  // the first is the year, in months
      break;
  }
  return b(1) + cycle(b(2), b(3), 12) + cycle(b(5), b(6), b(4)) + cycle(b(8), b(9), b(7));
}

}  // namespace nist

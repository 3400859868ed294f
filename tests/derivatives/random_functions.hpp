#pragma once
/// Random functions of one parameter with a known derivative, for measuring the derivative engine.

#include <cmath>
#include <cstdint>
#include <cstdio>
#include <cstdlib>
#include <cstring>
#include <functional>
#include <limits>
#include <random>
#include <string>

#include <whet/parameters/parameter.hpp>

namespace whet::test {

/// Uniform noise of mean 0 and rms 1 that depends on the argument alone, as a code's does.
[[nodiscard]] inline double hash_noise(double x, std::uint64_t seed = 0) {
  std::uint64_t bits;
  std::memcpy(&bits, &x, sizeof bits);
  bits += 0x9e3779b97f4a7c15ULL * (seed + 1);  // splitmix64, Steele, Lea & Flood (2014)
  bits = (bits ^ (bits >> 30)) * 0xbf58476d1ce4e5b9ULL;
  bits = (bits ^ (bits >> 27)) * 0x94d049bb133111ebULL;
  bits ^= bits >> 31;
  return (static_cast<double>(bits >> 11) * 0x1p-53 - 0.5) * std::sqrt(12.0);
}

/// A value printed to some significant digits and read again.
[[nodiscard]] inline double printed(double value, int digits) {
  char text[40];
  std::snprintf(text, sizeof text, "%.*e", digits - 1, value);
  return std::strtod(text, nullptr);
}

/// A function, its derivative at the fiducial value, and how it came about.
struct RandomFunction {
  std::string family;
  Parameter parameter;
  std::function<double(double)> f;
  double derivative;
};

enum class Output { clean, noisy, rounded };

/// The families, for loops over them.
inline const char* const families[] = {"smooth", "oscillating", "pole", "one-sided",
                                       "power",  "offset",      "zero", "narrow"};

/// One function of a family, of any order of magnitude in its parameter and its value.
/// @param output  clean; with white noise of 1e-12 ... 1e-3; or printed to 3 ... 11 digits
[[nodiscard]] inline RandomFunction random_function(const std::string& family, Output output,
                                                    std::mt19937_64& random) {
  const auto uniform = [&](double low, double high) {
    return low + (high - low) * (static_cast<double>(random() >> 11) * 0x1p-53);
  };
  const auto decades = [&](double low, double high) { return std::pow(10.0, uniform(low, high)); };
  const double sign = random() % 2 == 0 ? 1.0 : -1.0;
  const double unit = decades(-12, 12), height = sign * decades(-12, 12);
  // f(x) = height g(x / unit); g and its derivative at z.
  double z = uniform(0.4, 3.0);
  std::function<double(double)> g;
  double slope = 0.0;
  Parameter p{.name = "x"};
  if (family == "smooth") {
    const double a = uniform(-1, 1), b = uniform(-1, 1), c = uniform(-1, 1), k = uniform(-1.5, 1.5);
    const double q = uniform(0.2, 2.0);
    g = [=](double t) { return (a + b * t + c * t * t) * std::exp(k * t) + std::log1p(q * t * t); };
    slope = (b + 2 * c * z + k * (a + b * z + c * z * z)) * std::exp(k * z) +
            2 * q * z / (1 + q * z * z);
  } else if (family == "oscillating") {
    const double k = decades(0.3, 2.0), phase = uniform(0, 6.28), b = uniform(-1, 1);
    g = [=](double t) { return std::cos(k * t + phase) + b * t; };
    slope = -k * std::sin(k * z + phase) + b;
  } else if (family == "pole") {
    const double gap = z * decades(-3, -0.5);
    g = [=, pole = z + gap](double t) { return 1.0 / (pole - t); };
    slope = 1.0 / (((z + gap) - z) * ((z + gap) - z));
  } else if (family == "one-sided") {
    z = 0.0;
    const double a = uniform(0.3, 2.0), b = uniform(-1, 1), c = uniform(0.1, 2.0);
    g = [=](double t) { return std::log1p(c * t * t + a * t) + 0.3 * std::exp(b * t); };
    slope = a + 0.3 * b;
    p.lower = 0.0;
    p.scale = unit;
  } else if (family == "power") {
    const double k = uniform(-3, 4), b = uniform(-0.3, 0.3);
    g = [=](double t) { return std::pow(t, k) + b * std::sqrt(t); };
    slope = k * std::pow(z, k - 1) + 0.5 * b / std::sqrt(z);
  } else if (family == "offset") {
    const double large = decades(1, 6), b = uniform(0.5, 2);
    g = [=](double t) { return large + std::log(t) + std::sin(b * t); };
    slope = 1 / z + b * std::cos(b * z);
  } else if (family == "zero") {
    z = 0.0;
    const double a = uniform(-1, 1), b = uniform(0.2, 2), phase = uniform(0, 6.28);
    g = [=](double t) { return a * std::exp(b * t) + std::sin(t + phase); };
    slope = a * b + std::cos(phase);
    if (random() % 2 == 0) p.scale = unit;
  } else {  // narrow: a peak a good deal narrower than the fiducial value
    const double width = z * decades(-2, -0.3), centre = z + width * uniform(-1.5, 1.5);
    g = [=](double t) { return 0.1 + std::exp(-0.5 * std::pow((t - centre) / width, 2)); };
    slope = -(z - centre) / (width * width) * std::exp(-0.5 * std::pow((z - centre) / width, 2));
  }
  p.fiducial = z * unit;
  const double noise = decades(-12, -3);
  const int digits = 3 + static_cast<int>(random() % 9);
  const std::uint64_t seed = random();
  RandomFunction made{family, p, {}, height * slope / unit};
  made.f = [=](double x) {
    const double value = height * g(x / unit);
    if (output == Output::noisy) return value * (1.0 + noise * hash_noise(x, seed));
    return output == Output::rounded ? printed(value, digits) : value;
  };
  return made;
}

}  // namespace whet::test

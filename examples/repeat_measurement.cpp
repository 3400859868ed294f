// Planning the repeat of a published measurement. The fit that NIST certifies is the fiducial
// model, its residual standard deviation the noise of a reading. How sharp will each coefficient
// be, which ones can hardly be told apart, how many readings halve an error, and where is one more
// reading worth most?

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <exception>
#include <stdexcept>
#include <string>
#include <utility>
#include <vector>

#include <whet/whet.hpp>

#include <nist/command_line.hpp>
#include <nist/set.hpp>

namespace {

using nist::Rows;

/// What readings at these rows of predictors will tell of the coefficients, beside what is given.
whet::Information readings(const nist::Set& set, const Rows& rows, bool numerical,
                           const whet::Given& given = {}) {
  const auto noise =
      whet::DiagonalCovariance::uniform(static_cast<Eigen::Index>(rows.size()), nist::noise(set));
  const nist::Curve<> curve(set.model, rows);
  const auto forecast = [&](const auto& likelihood) {
    return whet::expected_information(nist::parameters(set), likelihood,
                                      {.accuracy = 1e-8, .given = given});
  };
  return numerical ? forecast(whet::GaussianLikelihood(curve, noise))
                   : forecast(whet::GaussianLikelihood(whet::exact(curve), noise));
}

void print_sigmas(const nist::Set& set, const whet::Forecast& forecast) {
  std::printf("\nHow sharply each coefficient will be fixed\n\n");
  std::printf("%-4s%16s%17s%17s%12s%12s%17s\n", "", "value", "sigma", "certified", "difference",
              "numerical", "if others known");
  for (std::size_t i = 0; i < set.coefficients.size(); ++i) {
    const std::string& name = set.coefficients[i];
    const double sigma = forecast.sigma(name), certified = nist::number(set.standard_deviations[i]);
    char difference[16] = "-";
    if (certified > 0.0) {
      std::snprintf(difference, sizeof difference, "%.1e", sigma / certified - 1.0);
    }
    std::printf("%-4s%16.8g%17.10g%17.10g%12s%12.1e%17.4g\n", name.c_str(),
                nist::number(set.values[i]), sigma, certified, difference,
                forecast.numerical_error(name) / sigma, forecast.conditional_sigma(name));
  }
  std::printf("\nDifference: sigma from the certified one. Numerical: how far sigma may be off.\n");
  for (const std::string& note : forecast.notes()) std::printf("Note: %s.\n", note.c_str());
}

void print_degeneracies(const nist::Set& set, const whet::Forecast& forecast) {
  std::vector<std::pair<double, std::string>> pairs;
  for (auto a = set.coefficients.begin(); a != set.coefficients.end(); ++a) {
    for (auto b = a + 1; b != set.coefficients.end(); ++b) {
      if (std::isinf(forecast.sigma(*a)) || std::isinf(forecast.sigma(*b))) continue;
      const double correlation = forecast.correlation(*a, *b);
      if (std::abs(correlation) <= 0.9) continue;
      pairs.emplace_back(correlation, *a + " up, " + *b + (correlation > 0.0 ? " up" : " down"));
    }
  }
  std::sort(pairs.begin(), pairs.end(),
            [](const auto& a, const auto& b) { return std::abs(a.first) > std::abs(b.first); });
  constexpr std::size_t most = 12;
  std::printf("\nWhat the readings can hardly tell apart\n\n");
  for (std::size_t i = 0; i < std::min(pairs.size(), most); ++i) {
    std::printf("%-16s correlation %+.7f\n", pairs[i].second.c_str(), pairs[i].first);
  }
  std::printf("Pairs correlated beyond 0.9: %zu%s. Directions not measured at all: %zu.\n",
              pairs.size(), pairs.size() > most ? ", of which the closest are listed" : "",
              forecast.unconstrained_directions().size());
}

void print_repeats(const whet::Information& information, const std::string& name,
                   std::size_t count) {
  std::printf("\nHow many readings it takes\n\n");
  const double once = whet::Forecast(information).sigma(name);
  for (const std::size_t times : {1U, 2U, 4U, 9U, 100U}) {
    const double sigma =
        whet::Forecast(information.repeated(static_cast<double>(times))).sigma(name);
    std::printf("%6zu readings: sigma(%s) = %-12.6g divided by %.6f\n", times * count, name.c_str(),
                sigma, once / sigma);
  }
}

void print_one_more(const nist::Set& set, const Rows& rows, const whet::Information& information,
                    const std::string& name, bool numerical) {
  const double now = whet::Forecast(information).sigma(name);
  const Rows candidates = nist::places(rows);
  // The shrinkings of the variance by the n readings there are, each counted as if it were small,
  // add up to the whole: the average one is worth 1 / n, which is the unit here.
  std::vector<double> sigmas, worths;
  for (const std::vector<double>& row : candidates) {
    const auto joined = information + readings(set, {row}, numerical, information);
    sigmas.push_back(whet::Forecast(joined).sigma(name));
    const double gain = now * now / (sigmas.back() * sigmas.back()) - 1.0;
    worths.push_back(static_cast<double>(rows.size()) * gain);
  }
  std::printf("\nWhere one more reading sharpens %s, and how many average ones it is worth\n\n",
              name.c_str());
  for (const std::string& predictor : set.predictors) std::printf("%11s", predictor.c_str());
  std::printf("%14s%9s\n", "sigma", "worth");
  const double best = *std::max_element(worths.begin(), worths.end());
  for (std::size_t i = 0; i < candidates.size(); ++i) {
    for (const double x : candidates[i]) std::printf("%11.6g", x);
    const int bar = std::isfinite(best) ? static_cast<int>(40.0 * worths[i] / best + 0.5) : 0;
    std::printf("%14.6g%9.2f  %.*s\n", sigmas[i], worths[i], bar,
                "########################################");
  }
}

}  // namespace

int main(int argc, char** argv) try {
  const nist::Command command = nist::parse({argv + 1, argv + argc});
  if (command.help) return std::fputs(nist::usage, stdout), 0;
  if (command.list) return std::puts(nist::list_of_sets().c_str()), 0;
  const nist::Set set = nist::load(command.set);
  const whet::Parameters parameters = nist::parameters(set);
  const bool exact_fit = nist::number(set.residual_standard_deviation) == 0.0;
  std::printf("To repeat %s (%s): %zu readings of\n%s\nwith noise %.10g, %s.\n", set.name.c_str(),
              set.model_text.c_str(), set.y.size(), set.formula.c_str(), nist::noise(set),
              exact_fit ? "as the published fit is exact: its certified deviations are 0"
                        : "the residual standard deviation that NIST certifies");

  const Rows rows = nist::numbers(set.x);
  const whet::Information information = readings(set, rows, command.numerical);
  const whet::Forecast forecast(information);
  const auto relative = [&](const whet::Parameter& p) {
    return forecast.sigma(p.name) / std::abs(p.fiducial);
  };
  const whet::Parameter& worst =
      *std::max_element(parameters.begin(), parameters.end(),
                        [&](const auto& a, const auto& b) { return relative(a) < relative(b); });
  const whet::Parameter& planned =
      command.coefficient.empty() ? worst : parameters[command.coefficient];

  print_sigmas(set, forecast);
  print_degeneracies(set, forecast);
  if (std::isfinite(forecast.sigma(planned.name))) {
    print_repeats(information, planned.name, rows.size());
    print_one_more(set, rows, information, planned.name, command.numerical);
  } else {
    std::printf("\n%s is not measured, however often all is repeated.\n", planned.name.c_str());
  }
  return 0;
} catch (const std::exception& error) {
  std::fprintf(stderr, "repeat_measurement: %s\n", error.what());
  const bool wrong_use = dynamic_cast<const std::invalid_argument*>(&error) != nullptr ||
                         dynamic_cast<const whet::ParameterError*>(&error) != nullptr;
  return wrong_use ? 2 : 1;
}

#pragma once
/// A set of the NIST Statistical Reference Datasets, read from its file, and its model as an
/// observable. The build hands over WHET_DATA_DIR, the folder that holds nist/.

#include <algorithm>
#include <charconv>
#include <cstddef>
#include <fstream>
#include <stdexcept>
#include <string>
#include <type_traits>
#include <utility>
#include <vector>

#include <nlohmann/json.hpp>

#include <whet/observables/tabulate.hpp>
#include <whet/parameters/parameters.hpp>
#include <whet/parameters/point.hpp>

#include <nist/models.hpp>

namespace nist {

/// Rows of predictors.
using Rows = std::vector<std::vector<double>>;

/// A set as published. Every number is kept as it was printed.
struct Set {
  std::string name{};
  Model model{};
  std::string model_text{}, formula{}, response{};
  std::vector<std::string> predictors{}, coefficients{};
  std::vector<std::string> values{}, standard_deviations{};  ///< certified by NIST
  std::string residual_standard_deviation{};                 ///< certified by NIST
  /// Standard deviations for noise 1 at the printed values, to thirty digits.
  std::vector<std::string> unit_sd{};
  std::vector<std::string> notes{};
  std::vector<std::vector<std::string>> x{};  ///< one row a reading, one column a predictor
  std::vector<std::string> y{};               ///< one a reading
};

/// A printed number in any real type.
template <class Real = double>
[[nodiscard]] Real number(const std::string& printed) {
  if constexpr (std::is_floating_point_v<Real>) {
    Real value{};
    const char* end = printed.data() + printed.size();
    const auto read = std::from_chars(printed.data(), end, value);
    if (read.ec != std::errc{} || read.ptr != end) {
      throw std::runtime_error("no number: \"" + printed + "\"");
    }
    return value;
  } else {
    return Real(printed);
  }
}

/// Printed numbers, or rows of them, in any real type.
template <class Real = double>
[[nodiscard]] std::vector<Real> numbers(const std::vector<std::string>& printed) {
  return whet::tabulate(printed, [](const std::string& one) { return number<Real>(one); });
}
template <class Real = double>
[[nodiscard]] std::vector<std::vector<Real>> numbers(
    const std::vector<std::vector<std::string>>& rows) {
  return whet::tabulate(rows, [](const auto& row) { return numbers<Real>(row); });
}

/// The names of all sets, "Misra1a, Chwirut2, ...".
[[nodiscard]] inline std::string list_of_sets() {
  std::string all;
  for (const NamedModel& named : models) {
    all += (all.empty() ? "" : ", ") + std::string(named.set);
  }
  return all;
}

/// Read a set by its name.
/// @throws std::invalid_argument that lists the right names, on a wrong one; std::runtime_error on
///   a file that is missing or damaged
[[nodiscard]] inline Set load(const std::string& name) {
  for (const NamedModel& named : models) {
    if (named.set != name) continue;
    const std::string path = std::string(WHET_DATA_DIR) + "/nist/" + name + ".json";
    std::ifstream file(path);
    if (!file) throw std::runtime_error("cannot read " + path);
    try {
      const nlohmann::json json = nlohmann::json::parse(file);
      return {.name = json.at("name"),
              .model = named.model,
              .model_text = json.at("model"),
              .formula = json.at("formula"),
              .response = json.at("response"),
              .predictors = json.at("predictors"),
              .coefficients = json.at("parameters"),
              .values = json.at("certified_values"),
              .standard_deviations = json.at("certified_standard_deviations"),
              .residual_standard_deviation = json.at("residual_standard_deviation"),
              .unit_sd = json.at("unit_sd"),
              .notes = json.at("notes"),
              .x = json.at("x"),
              .y = json.at("y")};
    } catch (const nlohmann::json::exception& error) {
      throw std::runtime_error(path + ": " + error.what());
    }
  }
  throw std::invalid_argument("no set \"" + name + "\"; the sets are " + list_of_sets());
}

/// The coefficients with the certified values as fiducial values.
[[nodiscard]] inline whet::Parameters parameters(const Set& set) {
  std::vector<whet::Parameter> list;
  for (std::size_t i = 0; i < set.coefficients.size(); ++i) {
    list.push_back({.name = set.coefficients[i], .fiducial = number(set.values[i])});
  }
  return whet::Parameters(std::move(list));
}

/// Where one more reading could be taken: along the range of one predictor, or at the rows there
/// are of several.
[[nodiscard]] inline Rows places(Rows rows) {
  std::sort(rows.begin(), rows.end());
  if (rows.front().size() == 1) {
    constexpr int steps = 24;
    const double low = rows.front()[0], high = rows.back()[0];
    rows.clear();
    for (int i = 0; i <= steps; ++i) rows.push_back({low + (high - low) * i / steps});
  }
  rows.erase(std::unique(rows.begin(), rows.end()), rows.end());
  return rows;
}

/// The certified residual standard deviation; 1 where that is 0, for an exact polynomial.
[[nodiscard]] inline double noise(const Set& set) {
  const double certified = number(set.residual_standard_deviation);
  return certified > 0.0 ? certified : 1.0;
}

/// The response at rows of predictors as an observable, generic in its scalar.
/// @tparam Real  the type of the predictors
template <class Real = double>
class Curve {
 public:
  Curve(Model model, std::vector<std::vector<Real>> x) : model_(model), x_(std::move(x)) {}
  explicit Curve(const Set& set) : Curve(set.model, numbers<Real>(set.x)) {}

  template <class Scalar>
  [[nodiscard]] std::vector<Scalar> operator()(const whet::Point<Scalar>& at) const {
    return whet::tabulate(x_, [&](const auto& row) { return response(model_, at.values(), row); });
  }

 private:
  Model model_;
  std::vector<std::vector<Real>> x_;
};

}  // namespace nist

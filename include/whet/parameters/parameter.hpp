#pragma once
/// One parameter of a model, and numbered families of them.

#include <cmath>
#include <limits>
#include <string>
#include <string_view>
#include <vector>

#include <whet/support/error.hpp>

namespace whet {

/// A parameter: its name, the fiducial value at which the forecast is made, and what the derivative
/// engine may know of it. A plain aggregate: `{"h", 0.7}` or `{.name = "h", .fiducial = 0.7}`.
struct Parameter {
  /// Unique within its Parameters, not empty.
  std::string name{};
  /// The value at which the model is expanded, in `unit`; finite.
  double fiducial{0.0};
  /// The domain of the code, lower <= fiducial <= upper: never evaluated outside. It is no prior.
  double lower{-std::numeric_limits<double>::infinity()};
  double upper{std::numeric_limits<double>::infinity()};
  /// A change of the parameter over which the model bends, in `unit`; 0: not given.
  double scale{0.0};
  /// How figures and typeset tables print it; empty: as its name. May be LaTeX.
  std::string label{};
  /// The unit of fiducial, lower, upper and scale; empty: none.
  std::string unit{};

  bool operator==(const Parameter&) const = default;
};

/// A family `name[0]` ... `name[count - 1]`, each like `prototype` but for its name (and its label,
/// where there is one, which gets the same bracketed number).
/// @throws ParameterError if `name` is empty or `count` < 1
[[nodiscard]] inline std::vector<Parameter> numbered(std::string_view name, int count,
                                                     const Parameter& prototype) {
  if (name.empty() || count < 1) {
    detail::fail<ParameterError>({.where = "numbered",
                                  .what = "family " + detail::in_quotes(name),
                                  .got = "a count of " + detail::text(count),
                                  .expected = "a name and a count >= 1"});
  }
  std::vector<Parameter> family(static_cast<std::size_t>(count), prototype);
  for (int i = 0; i < count; ++i) {
    Parameter& member = family[static_cast<std::size_t>(i)];
    const std::string bracket = "[" + detail::text(i) + "]";
    member.name = std::string(name) + bracket;
    if (!member.label.empty()) member.label += bracket;
  }
  return family;
}

/// The same with a fiducial value of its own for each member.
[[nodiscard]] inline std::vector<Parameter> numbered(std::string_view name,
                                                     const std::vector<double>& fiducials,
                                                     const Parameter& prototype = {}) {
  auto family = numbered(name, static_cast<int>(fiducials.size()), prototype);
  for (std::size_t i = 0; i < family.size(); ++i) family[i].fiducial = fiducials[i];
  return family;
}

namespace detail {

/// Check one parameter on its own.
/// @throws ParameterError that names it
inline void check(const Parameter& p) {
  const auto refuse = [&](std::string what, double got, std::string expected, std::string advice) {
    fail<ParameterError>({.where = "Parameters",
                          .what = "parameter " + in_quotes(p.name) + ", " + std::move(what),
                          .got = text(got),
                          .expected = std::move(expected),
                          .advice = std::move(advice)});
  };
  if (p.name.empty()) {
    fail<ParameterError>({.where = "Parameters",
                          .what = "a parameter with fiducial value " + text(p.fiducial),
                          .got = "an empty name",
                          .expected = "a name"});
  }
  if (!std::isfinite(p.fiducial)) {
    refuse("fiducial", p.fiducial, "a finite value", "Give the value of the model to expand at.");
  }
  if (!(p.lower < p.upper)) {
    refuse("lower bound", p.lower, "a value below the upper bound " + text(p.upper),
           "Leave both away where the code has no bound.");
  }
  if (p.fiducial < p.lower || p.fiducial > p.upper) {
    refuse("fiducial", p.fiducial, "a value in [" + text(p.lower) + ", " + text(p.upper) + "]",
           "The bounds are the domain of the code, not a prior.");
  }
  if (!(std::isfinite(p.scale) && p.scale >= 0.0)) {
    refuse("scale", p.scale, "a finite value > 0, or 0 for not given", "");
  }
}

}  // namespace detail
}  // namespace whet

#pragma once
/// Derivatives of an observable on their own, each with its error.

#include <cmath>
#include <limits>
#include <span>
#include <string>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/derivatives/derivatives.hpp>
#include <whet/derivatives/engine.hpp>
#include <whet/derivatives/exact_derivatives.hpp>
#include <whet/evaluation/evaluation.hpp>
#include <whet/observables/exact.hpp>
#include <whet/observables/observable.hpp>
#include <whet/parameters/parameters.hpp>
#include <whet/support/algebra.hpp>
#include <whet/support/error.hpp>

namespace whet {

/// What `differentiate` aims for.
struct DifferentiateOptions {
  /// The error allowed for each column, relative to its norm over the elements (Euclid), > 0. A
  /// forecast's `.accuracy` is another thing: relative to each sigma.
  double accuracy{1e-6};
  /// Calls of the observable allowed for each parameter.
  int evaluations_per_parameter{48};
};

namespace detail {

/// The data vector at the fiducial point.
/// @throws ObservableError in the code's own words
[[nodiscard]] inline Eigen::VectorXd evaluate_at_fiducial(const std::string& where,
                                                          const Parameters& parameters,
                                                          ObservableRef observable,
                                                          std::span<const std::string> labels) {
  Evaluation evaluation = evaluate(observable, Point<double>(parameters), labels);
  if (evaluation.failed()) {
    std::string point;
    for (const Parameter& p : parameters) {
      point += (point.empty() ? "" : ", ") + p.name + " = " + text(p.fiducial);
    }
    fail<ObservableError>({.where = where,
                           .what = "the observable failed at the fiducial point (" + point +
                                   "); it said: " + evaluation.failure,
                           .advice = "Choose fiducial values inside the domain of the code."});
  }
  return std::move(evaluation.data);
}

/// Refuse derivatives that do not exist, or that no step resolved: for functions of the parameters
/// whose derivatives all matter.
inline void refuse_kinks(const std::string& where, const Derivatives& derivatives) {
  const Eigen::VectorXd errors = column_norms<double>(derivatives.errors());
  const Eigen::VectorXd norms = column_norms<double>(derivatives.values());
  for (Eigen::Index p = 0; p < derivatives.parameters().size(); ++p) {
    const DerivativeStatus status = derivatives.reports()[static_cast<std::size_t>(p)].status;
    const double error = errors(p);
    const bool vague = error > 0.1 * norms(p) && status != DerivativeStatus::flat &&
                       status != DerivativeStatus::converged;
    if (status != DerivativeStatus::kink && status != DerivativeStatus::unresolved && !vague)
      continue;
    fail<DerivativeError>({.where = where,
                           .what = "the derivative of the function by parameter " +
                                   in_quotes(derivatives.parameters()[p].name) + " at " +
                                   text(derivatives.parameters()[p].fiducial),
                           .got = "a kink, a jump or an error of " + text(error, 2),
                           .expected = "a function that is differentiable there",
                           .advice = "Mark it exact, give the parameter a scale, or move it."});
  }
}

/// The engine with one observable at hand, until every column is as good as asked for, or as can
/// be.
[[nodiscard]] inline Derivatives differentiate_numerically(const Parameters& parameters,
                                                           ObservableRef observable,
                                                           std::vector<std::string> labels,
                                                           const DifferentiateOptions& options) {
  Eigen::VectorXd mean = evaluate_at_fiducial("differentiate", parameters, observable, labels);
  const auto length = [](const Eigen::VectorXd& data) { return column_norms<double>(data)(0); };
  const auto size = [&](const ColumnError& error) {
    Eigen::VectorXd all = error.noise;
    for (Eigen::Index i = 0; i < all.size(); ++i) all(i) += std::abs(error.truncation(i));
    return length(all);
  };
  DerivativeEngine engine(parameters, std::move(mean), labels, {.length = length, .size = size},
                          {.first_rungs = options.accuracy < 1e-3 ? 3 : 2,
                           .budget = options.evaluations_per_parameter});
  Eigen::VectorXd goals =
      Eigen::VectorXd::Constant(parameters.size(), std::numeric_limits<double>::infinity());
  for (;;) {
    const std::vector<Point<double>> batch = engine.next(goals);
    if (batch.empty()) return engine.derivatives();
    engine.tell(evaluate_serially(observable, batch, labels));
    for (Eigen::Index p = 0; p < parameters.size(); ++p) {
      goals(p) = options.accuracy * engine.column_size(p);
    }
  }
}

}  // namespace detail

/// The derivatives of an observable by all its parameters at their fiducial values, in few calls
/// and with an error for each element that holds: truncation, noise and rounding of the code.
/// @param parameters  P parameters; a given .scale or .lower and .upper help to choose the steps
/// @param observable  n elements; exact derivatives where it was marked `exact`
/// @return            n x P derivatives, in unit of datum / unit of parameter. Where noise, a kink
///   or the calls allowed stand between the steps and the accuracy, the errors and the reports
///   say so: nothing is thrown.
/// @throws ObservableError if it fails at the fiducial point, or at every step of a parameter, or
///   changes its length; ParameterError for options out of range
template <class F>
[[nodiscard]] Derivatives differentiate(const Parameters& parameters, const F& observable,
                                        const DifferentiateOptions& options = {}) {
  if constexpr (detail::require_observable<F>()) {
    if (!(options.accuracy > 0.0) || options.evaluations_per_parameter < 2) {
      detail::fail<ParameterError>({.where = "differentiate",
                                    .what = "options",
                                    .got = "accuracy " + detail::text(options.accuracy) +
                                           ", evaluations_per_parameter " +
                                           detail::text(options.evaluations_per_parameter),
                                    .expected = "an accuracy > 0 and at least 2 evaluations"});
    }
    if constexpr (detail::has_exact_derivatives<F>) {
      return detail::exact_derivatives(parameters, observable);
    } else {
      const auto call = [&observable](const Point<double>& at) -> Eigen::VectorXd {
        return detail::to_vector(observable(at));
      };
      return detail::differentiate_numerically(parameters, call, detail::labels_of(observable),
                                               options);
    }
  }
}

}  // namespace whet

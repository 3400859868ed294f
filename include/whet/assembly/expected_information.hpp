#pragma once
/// The information that an experiment is expected to hold on its parameters.

#include <algorithm>
#include <cmath>
#include <limits>
#include <string>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/assembly/assemble.hpp>
#include <whet/assembly/goals.hpp>
#include <whet/assembly/options.hpp>
#include <whet/assembly/whitener.hpp>
#include <whet/derivatives/derivatives.hpp>
#include <whet/derivatives/differentiate.hpp>
#include <whet/derivatives/engine.hpp>
#include <whet/derivatives/exact_derivatives.hpp>
#include <whet/evaluation/evaluation.hpp>
#include <whet/information/information.hpp>
#include <whet/likelihoods/likelihood.hpp>

namespace whet {

namespace detail {

/// A kink, a jump or structure that was not resolved, in a column that matters.
inline void refuse_kinks(const Parameters& parameters, const Derivatives& derivatives,
                         const Goals& goals) {
  for (Eigen::Index p = 0; p < parameters.size(); ++p) {
    const Eigen::Index column = derivatives.parameters().index(parameters[p].name);
    const DerivativeReport& report = derivatives.reports()[static_cast<std::size_t>(column)];
    const bool kinked = report.status == DerivativeStatus::kink;
    if (!(goals.excess(p) > 1.0)) continue;
    if (!kinked && report.status != DerivativeStatus::unresolved) continue;
    std::string where;
    for (const Eigen::Index i : report.elements) {
      if (where.size() > 40) {
        where += ", ...";
        break;
      }
      where += (where.empty() ? "" : ", ") + element_name(i, derivatives.labels());
    }
    fail<DerivativeError>(
        {.where = "expected_information",
         .what = "parameter " + in_quotes(parameters[p].name) + ", " + where,
         .got = kinked ? "a kink or jump at the fiducial value " + text(parameters[p].fiducial)
                       : "structure finer than any step tried",
         .expected = "an observable that is differentiable there",
         .advice = (report.note.empty() ? "" : report.note + ". ") +
                   "Move the fiducial value, give the parameter a scale, or hold it."});
  }
}

/// Say which derivatives keep the forecast from the accuracy asked for.
inline void note_shortfall(Information::Parts& parts, const Derivatives& derivatives,
                           const Goals& goals, double accuracy) {
  if (!(goals.reached > accuracy)) return;
  std::string which;
  for (Eigen::Index p = 0; p < parts.parameters.size(); ++p) {
    if (!(goals.excess(p) > 1.0)) continue;
    const std::string& name = parts.parameters[p].name;
    const Eigen::Index column = derivatives.parameters().index(name);
    const DerivativeReport& report = derivatives.reports()[static_cast<std::size_t>(column)];
    which += (which.empty() ? "" : ", ") + in_quotes(name) + " (" + in_words(report.status) +
             (report.note.empty() ? "" : "; " + report.note) + ")";
  }
  const std::string reached =
      std::isfinite(goals.reached) ? "to " + text(goals.reached, 2) : "without a bound";
  parts.notes.push_back("sigmas " + reached + " where " + text(accuracy, 2) + " was asked for" +
                        (which.empty() ? "" : ", by the derivatives by " + which));
}

/// Evaluate in rounds until the derivatives are sharp enough for the forecast as a whole, or cannot
/// become sharper.
[[nodiscard]] inline Derivatives refine(const Parameters& parameters, ObservableRef observable,
                                        Eigen::VectorXd mean, std::vector<std::string> labels,
                                        const Whitener& whitener,
                                        const InformationOptions& options) {
  const auto length = [&](const Eigen::VectorXd& data) { return whitener.length(data); };
  const auto size = [&](const ColumnError& error) { return whitener.size(error, true); };
  DerivativeEngine engine(parameters, std::move(mean), labels,
                          {.length = length, .size = size, .in_noise_units = true},
                          {.first_rungs = options.accuracy < 1e-3 ? 3 : 2,
                           .budget = options.evaluations_per_parameter});
  Eigen::VectorXd goals =
      Eigen::VectorXd::Constant(parameters.size(), std::numeric_limits<double>::infinity());
  for (;;) {
    const std::vector<Point<double>> batch = engine.next(goals);
    if (batch.empty()) return engine.derivatives();
    engine.tell(evaluate_serially(observable, batch, labels));
    bool estimated = true;  // a column whose calls all failed has none yet, and asks on its own
    for (Eigen::Index p = 0; p < parameters.size(); ++p) {
      estimated = estimated && std::isfinite(engine.error_size(p));
    }
    if (!estimated) continue;
    goals = goals_of(assemble(parameters, engine.derivatives(), whitener, options), options).sizes;
  }
}

inline void check(const Parameters& parameters, const InformationOptions& options) {
  if (parameters.empty()) {
    fail<ParameterError>({.where = "expected_information",
                          .what = "number of parameters",
                          .got = "0",
                          .expected = "at least one"});
  }
  if (!(options.accuracy > 0.0) || options.evaluations_per_parameter < 2) {
    fail<ParameterError>({.where = "expected_information",
                          .what = "options",
                          .got = "accuracy " + text(options.accuracy) +
                                 ", evaluations_per_parameter " +
                                 text(options.evaluations_per_parameter),
                          .expected = "an accuracy > 0 and at least 2 evaluations"});
  }
  std::vector<std::string> names;
  for (const Shift& shift : options.shifts) {
    if (shift.name.empty()) {
      fail<ParameterError>({.where = "expected_information",
                            .what = "name of shift " + text(names.size()),
                            .got = "an empty one",
                            .expected = "a name to ask for the bias by"});
    }
    if (std::find(names.begin(), names.end(), shift.name) != names.end()) {
      fail<ParameterError>({.where = "expected_information",
                            .what = "shift " + in_quotes(shift.name) + " is given twice",
                            .advice = "Names must differ."});
    }
    names.push_back(shift.name);
  }
  // What cannot be joined is refused before the observable is called.
  Information::Parts nothing;
  nothing.parameters = parameters;
  nothing.root = RootInformation(parameters.size());
  if (!options.name.empty()) nothing.experiments.push_back(options.name);
  (void)options.given.joined_to(Information(std::move(nothing)));
}

inline void check_data(const Eigen::VectorXd& mean) {
  if (mean.size() > 0) return;
  fail<ObservableError>({.where = "expected_information",
                         .what = "length of the data vector",
                         .got = "0",
                         .expected = "at least one element"});
}

/// The last step, the same for all: rows into R, and what a person should know of them.
[[nodiscard]] inline Information finished(const Parameters& parameters,
                                          const Derivatives& derivatives, const Whitener& whitener,
                                          const InformationOptions& options) {
  const Information information = assemble(parameters, derivatives, whitener, options);
  const Goals goals = goals_of(information, options);
  Information::Parts parts = information.parts();
  refuse_kinks(parameters, derivatives, goals);
  note_shortfall(parts, derivatives, goals, options.accuracy);
  return Information(std::move(parts));
}

}  // namespace detail

/// The derivatives of a likelihood's response, as sharp as the forecast needs them: refined in
/// rounds until the numerical error of every sigma is below `.accuracy`, in the metric of the data
/// noise, beside what is `.given`. Keep them to try another noise, cut or prior without one more
/// call.
/// @throws as `expected_information`
template <Likelihood L>
[[nodiscard]] Derivatives expected_derivatives(const Parameters& parameters, const L& likelihood,
                                               const InformationOptions& options = {}) {
  detail::check(parameters, options);
  const auto& response = likelihood.response();
  using F = std::remove_cvref_t<decltype(response)>;
  if constexpr (std::is_same_v<F, Derivatives>) {
    return response;
  } else {
    if constexpr (detail::has_exact_derivatives<F>) {
      return detail::exact_derivatives(parameters, response);
    } else {
      const auto call = [&response](const Point<double>& at) -> Eigen::VectorXd {
        return detail::to_vector(response(at));
      };
      const std::vector<std::string> labels = detail::labels_of(response);
      Eigen::VectorXd mean =
          detail::evaluate_at_fiducial("expected_information", parameters, call, labels);
      detail::check_data(mean);
      const auto& covariance = likelihood.covariance(mean);
      return detail::refine(parameters, call, std::move(mean), labels, detail::Whitener(covariance),
                            options);
    }
  }
}

/// The expected (Fisher) information of an experiment at the fiducial values of its parameters.
///
/// Exact and given derivatives are taken as they are; others are found by calling the observable,
/// as few times as the accuracy of the forecast allows.
/// @param parameters  P of them, at whose fiducial values the model is expanded
/// @param likelihood  a response and the covariance of the data about it
/// @param options     see InformationOptions: accuracy, given, shifts, name
/// @return            information on the P parameters, with its numerical errors and notes
/// @throws ParameterError    no parameters; derivatives by others; options out of range
/// @throws ObservableError   the observable fails at the fiducial point or at every step of a
///   parameter, changes its length, or returns no data; a shift of another length
/// @throws CovarianceError   the noise does not fit the data
/// @throws DerivativeError   a kink, a jump or unresolved structure in a derivative that matters
template <Likelihood L>
[[nodiscard]] Information expected_information(const Parameters& parameters, const L& likelihood,
                                               const InformationOptions& options = {}) {
  const Derivatives derivatives = expected_derivatives(parameters, likelihood, options);
  detail::check_data(derivatives.mean());
  const auto& covariance = likelihood.covariance(derivatives.mean());
  return detail::finished(parameters, derivatives, detail::Whitener(covariance), options);
}

}  // namespace whet

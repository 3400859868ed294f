#pragma once
/// From derivatives to information: whitened rows with the sizes of their errors.

#include <string>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/assembly/options.hpp>
#include <whet/assembly/whitener.hpp>
#include <whet/derivatives/derivatives.hpp>
#include <whet/information/information.hpp>

namespace whet::detail {

/// The column of the derivatives for each parameter that is asked for.
/// @throws ParameterError unless they are by the same parameters at the same fiducial values
[[nodiscard]] inline std::vector<Eigen::Index> columns_for(const Parameters& parameters,
                                                           const Derivatives& derivatives) {
  if (parameters.size() != derivatives.parameters().size()) {
    fail<ParameterError>({.where = "expected_information",
                          .what = "parameters of the derivatives",
                          .got = listed(derivatives.parameters().names()),
                          .expected = listed(parameters.names()),
                          .advice = "Derivatives belong to the parameters they were taken by; hold "
                                    "or integrate out afterwards."});
  }
  std::vector<Eigen::Index> columns;
  for (const Parameter& p : parameters) {
    columns.push_back(derivatives.parameters().index(p.name));
    check_same("expected_information", p, derivatives.parameters()[columns.back()]);
  }
  return columns;
}

/// The information of derivatives under a noise, with its error sources: source p is the error of
/// the column of parameter p.
[[nodiscard]] inline Information assemble(const Parameters& parameters,
                                          const Derivatives& derivatives, const Whitener& whitener,
                                          const InformationOptions& options) {
  const std::vector<Eigen::Index> columns = columns_for(parameters, derivatives);
  const Eigen::Index n = derivatives.mean().size(), count = parameters.size();
  const auto shifts = static_cast<Eigen::Index>(options.shifts.size());
  Information::Parts parts;
  Eigen::MatrixXd rows(n, count + shifts);
  for (Eigen::Index p = 0; p < count; ++p) {
    rows.col(p) = derivatives.values().col(columns[static_cast<std::size_t>(p)]);
  }
  for (Eigen::Index s = 0; s < shifts; ++s) {
    const Shift& shift = options.shifts[static_cast<std::size_t>(s)];
    if (shift.data.size() != n || !shift.data.allFinite()) {
      fail<ObservableError>({.where = "expected_information",
                             .what = "shift " + in_quotes(shift.name),
                             .got = shift.data.size() != n ? text(shift.data.size()) + " elements"
                                                           : "an element that is not finite",
                             .expected = text(n) + " finite elements, one a datum"});
    }
    rows.col(count + s) = shift.data;
    parts.shifts.push_back(shift.name);
  }
  rows = whitener.whiten(rows);
  Eigen::VectorXd lengths = column_norms<double>(rows);
  Eigen::VectorXd sizes(count), scatter(count);
  for (Eigen::Index p = 0; p < count; ++p) {
    const Eigen::Index column = columns[static_cast<std::size_t>(p)];
    const ColumnError error{
        derivatives.truncation().col(column), derivatives.noise().col(column),
        derivatives.reports()[static_cast<std::size_t>(column)].independent_noise};
    sizes(p) = whitener.size(error, derivatives.signs_known()) + whitener.rounding(lengths(p), n);
    // Little of independent noise points along the rows, but its square adds to F all the same.
    scatter(p) = error.independent_noise ? whitener.independent_length(error.noise) : 0.0;
    // Independent noise fills a column with more than it can do along any one direction.
    if (scatter(p) > 0.0) lengths(p) *= sizes(p) / (sizes(p) + scatter(p));
  }
  parts.parameters = parameters;
  parts.root = RootInformation(count, shifts);
  parts.root.fold(rows);
  NumericalErrors errors{ErrorSources::of_columns(std::move(sizes), lengths.head(count)), {}};
  if (!scatter.isZero(0.0)) errors.matrices.push_back(ErrorSources::of_columns(std::move(scatter)));
  parts.root.add(errors);
  if (!options.name.empty()) parts.experiments.push_back(options.name);
  return Information(std::move(parts));
}

}  // namespace whet::detail

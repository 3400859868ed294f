#pragma once
/// New parameters in place of old ones, by their Jacobian.

#include <algorithm>
#include <cmath>
#include <string>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/derivatives/derivatives.hpp>
#include <whet/derivatives/differentiate.hpp>
#include <whet/information/information.hpp>

namespace whet {

namespace detail {

/// The new fiducial values must give the old ones: to 1e-10 of the old value, or, near zero, of the
/// terms it is made of.
inline void check_fiducials(const Parameters& before, const std::vector<Eigen::Index>& which,
                            const Derivatives& function) {
  Eigen::VectorXd terms = Eigen::VectorXd::Zero(function.mean().size());
  for (Eigen::Index j = 0; j < function.parameters().size(); ++j) {
    terms += std::abs(function.parameters()[j].fiducial) * function.values().col(j).cwiseAbs();
  }
  for (std::size_t i = 0; i < which.size(); ++i) {
    const Parameter& old = before[which[i]];
    const auto row = static_cast<Eigen::Index>(i);
    const double value = function.mean()(row);
    const double size = std::abs(old.fiducial) + terms(row);
    if (std::abs(value - old.fiducial) <= 1e-10 * size) continue;
    fail<ParameterError>(
        {.where = "replacing",
         .what = "parameter " + in_quotes(old.name) + " at the new fiducial values",
         .got = text(value),
         .expected = text(old.fiducial) + ", its fiducial value",
         .advice = "The function gives the old parameters at a point of the new."});
  }
}

/// A new parameter, or a combination of them, that moves none of the old ones is no parameter.
inline void check_jacobian(const Eigen::MatrixXd& weighted, const Eigen::VectorXd& errors,
                           const Parameters& fresh) {
  const NullSpace<double> null =
      find_null_space<double>(root_of<double>(weighted), {ErrorSources::of_columns(errors), {}});
  if (null.size() == 0) return;
  const Eigen::VectorXd norms = column_norms<double>(weighted);
  Eigen::VectorXd parts = null.directions.col(0).cwiseAbs();
  for (Eigen::Index p = 0; p < parts.size(); ++p) {
    if (norms(p) > 0.0) parts(p) *= norms(p);
  }
  Eigen::Index part = 0;
  parts.maxCoeff(&part);
  fail<ParameterError>({.where = "replacing",
                        .what = "the Jacobian of the old parameters by " + listed(fresh.names()),
                        .got = "a singular one: a direction with a part along " +
                               in_quotes(fresh[part].name) + " moves none of them",
                        .expected = "as many independent new parameters as it has columns",
                        .advice = "Leave the redundant one out."});
}

[[nodiscard]] inline Information replaced(const Information& information,
                                          const std::vector<Eigen::Index>& which,
                                          const Derivatives& function) {
  const Information::Parts& before = information.parts();
  const Parameters& fresh = function.parameters();
  if (function.mean().size() != static_cast<Eigen::Index>(which.size())) {
    fail<ParameterError>({.where = "replacing",
                          .what = "number of values of the function",
                          .got = text(function.mean().size()),
                          .expected = text(which.size()) + ", one an old parameter"});
  }
  check_fiducials(before.parameters, which, function);
  refuse_kinks("replacing", function);

  const Eigen::Index old_count = before.parameters.size();
  const Eigen::VectorXd norms = column_norms<double>(before.root.root());
  const Eigen::VectorXd row_norms = column_norms<double>(transposed<double>(function.values()));
  Eigen::VectorXd weights(function.mean().size());
  for (Eigen::Index i = 0; i < weights.size(); ++i) {
    weights(i) = row_norms(i) > 0.0 ? 1.0 / row_norms(i) : 1.0;
  }
  const Eigen::MatrixXd function_errors = function.errors();
  Eigen::MatrixXd weighted(weights.size(), fresh.size());
  Eigen::VectorXd errors(fresh.size());
  for (Eigen::Index j = 0; j < fresh.size(); ++j) {
    weighted.col(j) = weights.cwiseProduct(function.values().col(j));
    errors(j) = weights.dot(function_errors.col(j));
  }
  check_jacobian(weighted, errors, fresh);

  // The new parameters take the place of the first old one.
  Information::Parts after = before;
  std::vector<Parameter> list;
  Eigen::MatrixXd jacobian = Eigen::MatrixXd::Zero(
      old_count, old_count - static_cast<Eigen::Index>(which.size()) + fresh.size());
  Eigen::Index column = 0, first_fresh = 0;
  for (Eigen::Index i = 0; i < old_count; ++i) {
    const auto place = std::find(which.begin(), which.end(), i);
    if (place == which.end()) {
      jacobian(i, column++) = 1.0;
      list.push_back(before.parameters[i]);
    } else if (i == *std::min_element(which.begin(), which.end())) {
      first_fresh = column;
      list.insert(list.end(), fresh.begin(), fresh.end());
      for (std::size_t k = 0; k < which.size(); ++k) {
        jacobian.row(which[k]).segment(column, fresh.size()) =
            function.values().row(static_cast<Eigen::Index>(k));
      }
      column += fresh.size();
    }
  }
  for (const Parameter& p : fresh) {
    const auto absent = before.absent.find(p.name);
    if (absent != before.absent.end() && absent->second != Absence::replaced) {
      refuse_absent("replacing", before, p.name, "Choose another name.");
    }
    after.absent.erase(p.name);  // replaced before, and back again
  }
  for (const Eigen::Index i : which) {
    const std::string& name = before.parameters[i].name;
    if (!fresh.contains(name)) after.absent[name] = Absence::replaced;
  }
  after.parameters = Parameters(std::move(list));
  after.root = before.root.replacing(jacobian);
  // The error of each numerical column of the Jacobian: |R dJ| <= sum_i |R_i| error_i.
  if (!function_errors.isZero(0.0)) {
    ErrorSources made{Eigen::VectorXd(fresh.size()),
                      Eigen::MatrixXd::Zero(fresh.size(), after.parameters.size()),
                      Eigen::VectorXd::Zero(fresh.size()), Eigen::VectorXd::Zero(fresh.size())};
    for (Eigen::Index j = 0; j < fresh.size(); ++j) {
      made.rows(j, first_fresh + j) = 1.0;
      made.sizes(j) = 0.0;
      for (std::size_t k = 0; k < which.size(); ++k) {
        made.sizes(j) += norms(which[k]) * function_errors(static_cast<Eigen::Index>(k), j);
      }
    }
    after.root.add({std::move(made), {}});
  }
  return Information(std::move(after));
}

}  // namespace detail

template <class F>
Information Information::replacing(const std::vector<std::string>& old, const Parameters& fresh,
                                   const F& function) const {
  const auto which = places("replacing", old);
  if (which.empty()) {
    detail::fail<ParameterError>({.where = "replacing",
                                  .what = "number of parameters to replace",
                                  .got = "0",
                                  .expected = "at least one"});
  }
  return detail::replaced(*this, which, differentiate(fresh, function, {.accuracy = 1e-10}));
}

}  // namespace whet

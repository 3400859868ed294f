#pragma once
/// What is known of parameters beforehand, as rows of information.

#include <algorithm>
#include <cmath>
#include <limits>
#include <string>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/information/covariance_rows.hpp>
#include <whet/support/algebra.hpp>
#include <whet/support/error.hpp>

namespace whet {

/// A Gaussian prior centred on the fiducial values, joined by `information + prior` to information
/// that knows its parameters. It is no experiment: it is not repeated, and shifts do not move it.
class GaussianPrior {
 public:
  /// One parameter.
  /// @param sigma  its prior standard deviation, in its unit
  /// @throws ParameterError naming it if sigma is not finite and positive
  GaussianPrior(std::string name, double sigma)
      : names_{std::move(name)}, rows_(1, 1), errors_(NumericalErrors::none(1)) {
    if (!(std::isfinite(sigma) && sigma > 0.0)) {
      detail::fail<ParameterError>(
          {.where = "GaussianPrior",
           .what = "standard deviation of parameter " + detail::in_quotes(names_.front()),
           .got = detail::text(sigma),
           .expected = "a finite value > 0",
           .advice =
               "An infinite prior is none: leave it out. A known parameter is held: holding()."});
    }
    rows_(0, 0) = 1.0 / sigma;
    errors_.columns = ErrorSources::of_columns(std::numeric_limits<double>::epsilon() * rows_);
  }

  /// Several parameters with a covariance, in the order of their names.
  /// @param covariance  k x k, element (i, j) in unit of parameter i times unit of parameter j
  /// @throws ParameterError if the number of names differs or a name stands twice;
  /// @throws CovarianceError as DenseCovariance
  template <class Derived>
  GaussianPrior(std::vector<std::string> names, const Eigen::MatrixBase<Derived>& covariance)
      : names_(std::move(names)) {
    const auto count = static_cast<Eigen::Index>(names_.size());
    if (count != covariance.rows()) {
      detail::fail<ParameterError>(
          {.where = "GaussianPrior",
           .what = "number of names",
           .got = detail::text(count),
           .expected = detail::text(covariance.rows()) + ", one a row of the covariance"});
    }
    for (const std::string& name : names_) {
      if (std::count(names_.begin(), names_.end(), name) < 2) continue;
      detail::fail<ParameterError>(
          {.where = "GaussianPrior",
           .what = "parameter " + detail::in_quotes(name) + " is given twice",
           .advice = "Names must differ."});
    }
    detail::CovarianceRows whitened =
        detail::rows_of_covariance<double>("GaussianPrior", covariance.template cast<double>(),
                                           std::numeric_limits<double>::epsilon());
    rows_ = std::move(whitened.rows);
    errors_ = std::move(whitened.errors);
  }

  [[nodiscard]] const std::vector<std::string>& names() const noexcept { return names_; }
  /// Whitened rows, k x k, one column a name, in 1 / unit of the parameter.
  [[nodiscard]] const Eigen::MatrixXd& rows() const noexcept { return rows_; }
  /// How far rounding leaves them uncertain.
  [[nodiscard]] const NumericalErrors& errors() const noexcept { return errors_; }

 private:
  std::vector<std::string> names_;
  Eigen::MatrixXd rows_;
  NumericalErrors errors_;
};

}  // namespace whet

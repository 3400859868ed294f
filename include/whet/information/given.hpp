#pragma once
/// Information made from a matrix or a covariance that came from elsewhere.

#include <algorithm>
#include <cmath>
#include <limits>
#include <string>
#include <utility>

#include <Eigen/Cholesky>
#include <Eigen/Core>

#include <whet/information/covariance_rows.hpp>
#include <whet/information/information.hpp>

namespace whet {

namespace detail {

/// The relative error of elements with that many significant digits.
[[nodiscard]] inline double printed_error(const GivenOptions& options) {
  if (options.digits < 0) {
    fail<CovarianceError>({.where = "Information",
                           .what = "significant digits of the matrix",
                           .got = text(options.digits),
                           .expected = "a number >= 1, or 0 for double precision"});
  }
  return options.digits == 0 ? std::numeric_limits<double>::epsilon()
                             : 0.5 * std::pow(10.0, 1 - options.digits);
}

template <class Real>
void check_given(const Parameters& parameters, const MatrixOf<Real>& matrix, double error) {
  const Eigen::Index count = parameters.size();
  const auto refuse = [](std::string what, std::string got, std::string expected) {
    fail<CovarianceError>({.where = "Information::from_matrix",
                           .what = std::move(what),
                           .got = std::move(got),
                           .expected = std::move(expected)});
  };
  if (matrix.rows() != count || matrix.cols() != count) {
    refuse("shape", text(matrix.rows()) + " x " + text(matrix.cols()),
           text(count) + " x " + text(count) + ", one row and column a parameter");
  }
  for (Eigen::Index j = 0; j < count; ++j) {
    for (Eigen::Index i = 0; i <= j; ++i) {
      const std::string pair =
          "element (" + in_quotes(parameters[i].name) + ", " + in_quotes(parameters[j].name) + ")";
      const double upper = matrix(i, j), lower = matrix(j, i);
      if (!std::isfinite(upper) || !std::isfinite(lower)) {
        refuse(pair, text(std::isfinite(upper) ? lower : upper), "a finite value");
      }
      if (i == j && upper < 0.0) refuse(pair, text(upper), "a value >= 0");
      // Printed numbers may differ by a unit of their last digit, products by rounding.
      const double size = std::sqrt(matrix(i, i)) * std::sqrt(matrix(j, j));
      const double allowed = 2.0 * error * std::abs(upper) + 1e-12 * size;
      if (i != j && !(std::abs(upper - lower) <= allowed)) {
        refuse(pair + " and its mirror", text(upper) + " and " + text(lower),
               "equal values: an information matrix is symmetric");
      }
    }
  }
}

/// Rows W with W^T W = F for a matrix that is semidefinite to its error, by a Cholesky
/// factorisation with diagonal pivoting of F scaled to unit diagonal. What is left below the error
/// is taken as zero: those directions W does not measure at all.
/// @param error  of each element, as above; grows by what was left
template <class Real>
[[nodiscard]] MatrixOf<Real> semidefinite_rows(const Parameters& parameters,
                                               const MatrixOf<Real>& matrix, double& error) {
  const Eigen::Index count = matrix.rows();
  const Eigen::VectorXd scale = matrix.diagonal().cwiseSqrt();
  Eigen::MatrixXd rest = Eigen::MatrixXd::Zero(count, count);
  for (Eigen::Index j = 0; j < count; ++j) {
    for (Eigen::Index i = 0; i < count; ++i) {
      if (scale(i) > 0.0 && scale(j) > 0.0) {
        rest(i, j) = 0.5 * (matrix(i, j) + matrix(j, i)) / scale(i) / scale(j);
      } else if (matrix(i, j) != 0.0) {
        fail<CovarianceError>({.where = "Information::from_matrix",
                               .what = "element (" + in_quotes(parameters[i].name) + ", " +
                                       in_quotes(parameters[j].name) + ")",
                               .got = text(matrix(i, j)),
                               .expected = "0, as one of the two has no information of its own"});
      }
    }
  }
  // The elements' errors move an eigenvalue of the scaled matrix by no more than this.
  const double tolerance = static_cast<double>(count) * error;
  const Eigen::MatrixXd lifted = rest + tolerance * Eigen::MatrixXd::Identity(count, count);
  if (Eigen::LLT<Eigen::MatrixXd>(lifted).info() != Eigen::Success) {
    fail<CovarianceError>(
        {.where = "Information::from_matrix",
         .what = "the matrix on " + listed(parameters.names()),
         .got = "a negative eigenvalue beyond its digits",
         .expected = "a positive semidefinite matrix",
         .advice = "Say how many digits were printed, or look for a slip of sign."});
  }
  Eigen::MatrixXd rows = Eigen::MatrixXd::Zero(count, count);
  for (Eigen::Index step = 0; step < count; ++step) {
    Eigen::Index pivot = 0;
    const double largest = rest.diagonal().maxCoeff(&pivot);
    if (largest <= tolerance) break;
    const Eigen::RowVectorXd row = rest.row(pivot) / std::sqrt(largest);
    rest.noalias() -= row.transpose() * row;
    rest.row(pivot).setZero();
    rest.col(pivot).setZero();
    rows.row(step) = row;
  }
  // Of a semidefinite rest, to `tolerance`, no element is larger than the largest of the diagonal.
  if (rest.diagonal().maxCoeff() > 0.0) error += 2.0 * tolerance;
  return rows * scale.asDiagonal();
}

[[nodiscard]] inline Information given(const Parameters& parameters, const Eigen::MatrixXd& rows,
                                       const NumericalErrors& errors, const GivenOptions& options) {
  Information::Parts parts;
  parts.parameters = parameters;
  parts.root = RootInformation(parameters.size());
  parts.root.fold(rows);
  parts.root.add(errors);
  if (!options.name.empty()) parts.experiments.push_back(options.name);
  return Information(std::move(parts));
}

}  // namespace detail

template <class Derived>
Information Information::from_matrix(const Parameters& parameters,
                                     const Eigen::MatrixBase<Derived>& matrix,
                                     const GivenOptions& options) {
  const Eigen::MatrixXd f = matrix;
  const double error = detail::printed_error(options);
  detail::check_given<double>(parameters, f, error);
  double of_elements = detail::element_error<double>(f, error);
  const Eigen::MatrixXd rows = detail::semidefinite_rows<double>(parameters, f, of_elements);
  // |dF_pq| <= g_p g_q.
  ErrorSources errors = ErrorSources::of_columns(std::sqrt(of_elements) * f.diagonal().cwiseSqrt());
  return detail::given(parameters, rows,
                       {ErrorSources::none(parameters.size()), {std::move(errors)}}, options);
}

template <class Derived>
Information Information::from_covariance(const Parameters& parameters,
                                         const Eigen::MatrixBase<Derived>& covariance,
                                         const GivenOptions& options) {
  const Eigen::MatrixXd c = covariance;
  const double error = detail::printed_error(options);
  detail::check_given<double>(parameters, c, error);
  detail::CovarianceRows whitened =
      detail::rows_of_covariance<double>("Information::from_covariance", c, error);
  return detail::given(parameters, whitened.rows, whitened.errors, options);
}

}  // namespace whet

#pragma once
/// A covariance with its type put away, and the sizes it gives to errors of derivatives.

#include <cmath>
#include <limits>

#include <Eigen/Core>

#include <whet/covariances/covariance.hpp>
#include <whet/derivatives/metric.hpp>
#include <whet/support/function_ref.hpp>

namespace whet::detail {

/// Refers to a covariance that it does not own.
class Whitener {
 public:
  template <Covariance C>
  explicit Whitener(const C& covariance)
      : object_(&covariance),
        whiten_([](const void* c, const Eigen::MatrixXd& rows) {
          return static_cast<const C*>(c)->whiten(rows);
        }),
        bound_([](const void* c, const Eigen::VectorXd& errors) {
          return static_cast<const C*>(c)->bound(errors);
        }),
        independent_bound_([](const void* c, const Eigen::VectorXd& errors) {
          return static_cast<const C*>(c)->independent_bound(errors);
        }),
        independent_length_([](const void* c, const Eigen::VectorXd& errors) {
          return static_cast<const C*>(c)->independent_length(errors);
        }),
        condition_(covariance.condition()) {}

  [[nodiscard]] Eigen::MatrixXd whiten(const Eigen::MatrixXd& rows) const {
    return whiten_(object_, rows);
  }
  [[nodiscard]] double length(const Eigen::VectorXd& data) const { return whiten(data).norm(); }

  /// How long the whitened error of a column can be.
  [[nodiscard]] double size(const ColumnError& error, bool signs_known) const {
    const double truncation =
        signs_known ? length(error.truncation) : bound_(object_, error.truncation.cwiseAbs());
    if (error.noise.isZero(0.0)) return truncation;
    // Solver tolerances jitter coherently: only noise shown to be independent averages out.
    return truncation + (error.independent_noise ? independent_bound_(object_, error.noise)
                                                 : bound_(object_, error.noise));
  }

  /// The whitened length of noise that is independent from element to element.
  [[nodiscard]] double independent_length(const Eigen::VectorXd& noise) const {
    return independent_length_(object_, noise);
  }
  /// What rounding leaves uncertain of a whitened column of n elements and that length. It grows as
  /// the root of n, as rows are folded: by 50 epsilon at a million, measured.
  [[nodiscard]] double rounding(double length, Eigen::Index n) const {
    const double factor = 8.0 + std::sqrt(static_cast<double>(n)) / 8.0;
    return factor * std::numeric_limits<double>::epsilon() * condition_ * length;
  }

 private:
  const void* object_;
  Eigen::MatrixXd (*whiten_)(const void*, const Eigen::MatrixXd&);
  double (*bound_)(const void*, const Eigen::VectorXd&);
  double (*independent_bound_)(const void*, const Eigen::VectorXd&);
  double (*independent_length_)(const void*, const Eigen::VectorXd&);
  double condition_;
};

}  // namespace whet::detail

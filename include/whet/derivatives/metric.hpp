#pragma once
/// How data vectors and the errors of a column of derivatives are measured.

#include <Eigen/Core>

#include <whet/support/function_ref.hpp>

namespace whet::detail {

/// The error of one column of derivatives, element by element, in unit of datum / unit of
/// parameter.
struct ColumnError {
  Eigen::VectorXd truncation{};   ///< n, a signed estimate whose size is the claim
  Eigen::VectorXd noise{};        ///< n, >= 0
  bool independent_noise{false};  ///< from element to element, as far as n draws can show

  /// The error of the elements i alone for which chosen(i).
  template <class Chosen>
  [[nodiscard]] ColumnError of(const Chosen& chosen) const {
    ColumnError part = *this;
    for (Eigen::Index i = 0; i < noise.size(); ++i) {
      if (!chosen(i)) part.truncation(i) = part.noise(i) = 0.0;
    }
    return part;
  }
  /// The same of one kind.
  [[nodiscard]] ColumnError of_truncation() const {
    return {truncation, Eigen::VectorXd::Zero(noise.size()), independent_noise};
  }
  [[nodiscard]] ColumnError of_noise() const {
    return {Eigen::VectorXd::Zero(noise.size()), noise, independent_noise};
  }
};

/// Sizes of data vectors, by the data's own noise in a forecast. Refers to functions it does not
/// own.
struct Metric {
  /// The length of a signed data vector.
  FunctionRef<double(const Eigen::VectorXd&)> length;
  /// The size of the error of a column, in the unit of `length` / unit of parameter.
  FunctionRef<double(const ColumnError&)> size;
  /// A length of 1 is one standard deviation of the data: first steps are taken from it.
  bool in_noise_units{false};
};

}  // namespace whet::detail

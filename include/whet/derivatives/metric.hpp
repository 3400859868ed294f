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

  /// The error of some elements alone.
  template <class Mask>
  [[nodiscard]] ColumnError of(const Mask& mask) const {
    return {mask.select(truncation.array(), 0.0).matrix(), mask.select(noise.array(), 0.0).matrix(),
            independent_noise};
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

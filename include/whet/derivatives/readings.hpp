#pragma once
/// The values of an observable along one parameter.

#include <algorithm>
#include <cmath>
#include <utility>
#include <vector>

#include <Eigen/Core>

namespace whet::detail {

/// Data vectors at the fiducial point and at displacements of one parameter.
struct Readings {
  Eigen::VectorXd origin{};             ///< n, at the fiducial point
  std::vector<double> displacements{};  ///< K, distinct, none 0
  Eigen::MatrixXd values{};             ///< n x K

  [[nodiscard]] Eigen::Index elements() const noexcept { return origin.size(); }
  [[nodiscard]] Eigen::Index count() const noexcept {
    return static_cast<Eigen::Index>(displacements.size());
  }

  void add(double displacement, const Eigen::VectorXd& data) {
    displacements.push_back(displacement);
    values.conservativeResize(origin.size(), values.cols() + 1);
    values.col(values.cols() - 1) = data;
  }

  /// Forget what lies beyond a displacement.
  void keep_within(double displacement) {
    Readings kept{.origin = origin};
    for (Eigen::Index k = 0; k < count(); ++k) {
      const double t = displacements[static_cast<std::size_t>(k)];
      if (std::abs(t) <= displacement) kept.add(t, values.col(k));
    }
    *this = std::move(kept);
  }

  /// The changes from the fiducial point, n x K.
  [[nodiscard]] Eigen::MatrixXd changes() const { return values.colwise() - origin; }

  /// How much larger than at the fiducial point each value is, n x K, within 1 ... 1e6: noise that
  /// is relative grows with it.
  [[nodiscard]] Eigen::MatrixXd growths() const {
    return (values.array().abs().colwise() / origin.array().abs())
        .unaryExpr([](double g) { return g > 1.0 ? std::min(g, 1e6) : 1.0; })
        .matrix();
  }
};

}  // namespace whet::detail

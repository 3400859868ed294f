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

  /// The change of the data vector from the fiducial point to displacement k, n.
  [[nodiscard]] Eigen::VectorXd change(Eigen::Index k) const {
    return filled(elements(), [&](Eigen::Index i) { return values(i, k) - origin(i); });
  }

  /// The values of element i, K.
  [[nodiscard]] Eigen::VectorXd values_of(Eigen::Index i) const {
    return filled(count(), [&](Eigen::Index k) { return values(i, k); });
  }
  /// The changes of element i from the fiducial point, K.
  [[nodiscard]] Eigen::VectorXd changes_of(Eigen::Index i) const {
    return filled(count(), [&](Eigen::Index k) { return values(i, k) - origin(i); });
  }
  /// How much larger than at the fiducial point each value of element i is, K, within 1 ... 1e6:
  /// noise that is relative grows with it.
  [[nodiscard]] Eigen::VectorXd growths_of(Eigen::Index i) const {
    return filled(count(), [&](Eigen::Index k) {
      const double growth = std::abs(values(i, k)) / std::abs(origin(i));
      return growth > 1.0 ? std::min(growth, 1e6) : 1.0;
    });
  }

 private:
  template <class F>
  [[nodiscard]] static Eigen::VectorXd filled(Eigen::Index size, F f) {
    Eigen::VectorXd all(size);
    for (Eigen::Index k = 0; k < size; ++k) all(k) = f(k);
    return all;
  }
};

}  // namespace whet::detail

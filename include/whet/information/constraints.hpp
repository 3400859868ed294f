#pragma once
/// From a root with its errors to the covariance of what is measured.

#include <cmath>
#include <limits>
#include <vector>

#include <Eigen/Core>

#include <whet/information/null_space.hpp>
#include <whet/information/root_information.hpp>

namespace whet::detail {

/// The solution of a root: what is measured, with which covariance, and what is not.
template <class Real>
struct Constraints {
  NullSpace<Real> null{};
  /// P x P, A with C = A A^T, the null directions held where they are: the covariance of all that
  /// does not depend on them.
  MatrixOf<Real> half{};
  /// P: norm of each row of A; infinite for a parameter with a part in a null direction.
  VectorOf<Real> sigmas{};
  /// The root with the null directions fixed, shifts riding along.
  MatrixOf<Real> root{};

  [[nodiscard]] bool measured(Eigen::Index p) const {
    return sigmas(p) < std::numeric_limits<Real>::infinity();
  }
};

/// @param root   (P + S) x (P + S), the shifts in the last S columns
/// @param count  P
template <class Real>
[[nodiscard]] Constraints<Real> solve(const MatrixOf<Real>& root, Eigen::Index count,
                                      const NumericalErrors& errors) {
  using std::abs;
  Constraints<Real> solved;
  solved.null = find_null_space<Real>(leading<Real>(root, count, count), errors);
  solved.root = with_null_space_fixed<Real>(root, solved.null);
  solved.half = upper_solution<Real>(solved.root, MatrixOf<Real>::Identity(count, count));
  // The rows that fix the null directions lend no information to the rest: theirs is taken out.
  solved.half -=
      product<Real>(solved.null.directions, product<Real>(solved.null.fixing, solved.half));
  const VectorOf<Real> rest = column_norms<Real>(transposed<Real>(solved.half));
  solved.sigmas = rest;
  const Real rounding = Real(static_cast<double>(count)) * std::numeric_limits<Real>::epsilon();
  for (Eigen::Index k = 0; k < solved.null.size(); ++k) {
    const Real bound = Real(solved.null.bounds[static_cast<std::size_t>(k)]);
    for (Eigen::Index a = 0; a < count; ++a) {
      // A part that the errors could have made, or rounding, is none.
      const Real part = abs(solved.null.directions(a, k));
      if (part > rest(a) * bound + rounding / solved.null.scales(a)) {
        solved.sigmas(a) = std::numeric_limits<Real>::infinity();
      }
    }
  }
  return solved;
}

}  // namespace whet::detail

namespace whet {

template <class Real>
typename BasicRootInformation<Real>::Vector BasicRootInformation<Real>::sigmas() const {
  return detail::solve<Real>(root_, parameters_, errors()).sigmas;
}

}  // namespace whet

#pragma once
/// How far the error sources can have moved each sigma.

#include <algorithm>
#include <cmath>
#include <limits>
#include <vector>

#include <Eigen/Core>

#include <whet/information/constraints.hpp>
#include <whet/information/error_sources.hpp>

namespace whet::detail {

/// What error sources do to a forecast, to first order.
struct SourceEffects {
  Eigen::MatrixXd on_sigmas{};  ///< K x P, size_q |(m C)_qa|
  Eigen::VectorXd parts{};      ///< K, size_q sigma(m_q), no unit; their sum is eta

  SourceEffects() = default;
  SourceEffects(const ErrorSources& sources, const Eigen::MatrixXd& half)
      : on_sigmas(product<double>(product<double>(sources.rows, half), transposed<double>(half))),
        parts(sources.sizes.cwiseProduct(sources.sigmas(half))) {
    for (Eigen::Index a = 0; a < on_sigmas.cols(); ++a) {
      on_sigmas.col(a) = on_sigmas.col(a).cwiseAbs().cwiseProduct(sources.sizes);
    }
  }
};

/// Bounds on the numerical error of a forecast, for errors of any size that leave it a bound.
///
/// In units of the forecast, C^(1/2), the rows W are U with U^T U = 1, their error is B with
/// |B| <= eta = sum_q e_q sigma(m_q), and that of F beside is H with |H| <= h = sum_m eta_m^2. The
/// true information is G = (U + B)^T (U + B) + H, no eigenvalue below (1 - eta)^2 - h. Let u be the
/// unit vector along row a of C^(1/2), and y = G^-1 u, so that s = u^T y = (true sigma_a /
/// sigma_a)^2.
/// - Below: s >= 1 / (u^T G u) (Cauchy-Schwarz), and |B u| <= f, the first order.
/// - Above: s <= |y| = |U y| <= |(U + B) y| + |B y| = sqrt(s - y^T H y) + |B y|.
/// - |y - u| = |G^-1 (G - 1) u| <= ((1 + eta) f + eta + |H u|) / least eigenvalue.
/// Hence |sqrt(s) - 1| <= |B y| + |y^T H y| / 2.
struct SigmaErrors {
  Eigen::VectorXd sizes{};                ///< P, a bound on |delta sigma_a|, or infinity
  SourceEffects columns{};                ///< of the errors of columns
  std::vector<SourceEffects> matrices{};  ///< of those of F
};

/// @param solved  sigmas that are infinite get an error of zero: they are infinite for certain
[[nodiscard]] inline SigmaErrors sigma_errors(const Constraints<double>& solved,
                                              const NumericalErrors& errors) {
  const double infinity = std::numeric_limits<double>::infinity();
  SigmaErrors bounds;
  bounds.columns = SourceEffects(errors.columns, solved.half);
  double h = 0.0;
  for (const ErrorSources& matrix : errors.matrices) {
    bounds.matrices.emplace_back(matrix, solved.half);
    const double part = bounds.matrices.back().parts.sum();
    h += part * part;
  }
  const double eta = bounds.columns.parts.sum();
  const double least = eta < 1.0 ? (1.0 - eta) * (1.0 - eta) - h : 0.0;

  // What is taken as null must be so for a reason.
  bool resolved = true;
  for (Eigen::Index k = 0; k < solved.null.size(); ++k) {
    resolved = resolved && !errors.columns.unresolved(solved.null.directions.col(k));
  }

  bounds.sizes = Eigen::VectorXd::Zero(solved.sigmas.size());
  for (Eigen::Index a = 0; a < bounds.sizes.size(); ++a) {
    const double sigma = solved.sigmas(a);
    if (!(sigma < infinity)) continue;
    if (!(least > 0.0) || !resolved) {
      bounds.sizes(a) = infinity;
      continue;
    }
    const double first = bounds.columns.on_sigmas.col(a).sum() / sigma;
    double turned = (1.0 + eta) * first + eta;
    for (const SourceEffects& m : bounds.matrices) {
      turned += m.parts.sum() * m.on_sigmas.col(a).sum() / sigma;
    }
    turned /= least;
    double relative = first + eta * turned;
    for (const SourceEffects& m : bounds.matrices) {
      const double part = m.on_sigmas.col(a).sum() / sigma + m.parts.sum() * turned;
      relative += 0.5 * part * part;
    }
    const double rounding = 8.0 * std::numeric_limits<double>::epsilon();
    bounds.sizes(a) = sigma * (std::min(relative, 1.0 / std::sqrt(least) - 1.0) + rounding);
  }
  return bounds;
}

}  // namespace whet::detail

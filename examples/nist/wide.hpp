#pragma once
/// The sets in fifty digits: the same models and the same algebra, in another real type.

#include <algorithm>
#include <cstddef>
#include <vector>

#include <boost/multiprecision/cpp_bin_float.hpp>

#include <whet/derivatives/dual.hpp>
#include <whet/derivatives/dual_functions.hpp>
#include <whet/information/constraints.hpp>
#include <whet/information/root_information.hpp>

#include <nist/set.hpp>

namespace nist {

/// Fifty digits, without the expression templates that neither Eigen nor dual numbers can use.
using Wide = boost::multiprecision::number<boost::multiprecision::cpp_bin_float_50::backend_type,
                                           boost::multiprecision::et_off>;

/// The standard deviations for noise 1 at the certified values as printed: everything, from the
/// decimal strings to the square root, in fifty digits.
[[nodiscard]] inline std::vector<Wide> wide_unit_sigmas(const Set& set) {
  using Dual = whet::Dual<Wide, 11>;  // no set has more coefficients
  const whet::Parameters names = parameters(set);
  std::vector<Dual> at;
  for (std::size_t p = 0; p < set.values.size(); ++p) {
    at.push_back(Dual::variable(number<Wide>(set.values[p]), p));
  }
  const std::vector<Dual> curve = Curve<Wide>(set)(whet::Point<Dual>(names, std::move(at)));
  whet::BasicRootInformation<Wide>::Matrix rows(static_cast<Eigen::Index>(curve.size()),
                                                names.size());
  for (Eigen::Index i = 0; i < rows.rows(); ++i) {
    const auto& gradient = curve[static_cast<std::size_t>(i)].gradient();
    for (Eigen::Index p = 0; p < rows.cols(); ++p)
      rows(i, p) = gradient[static_cast<std::size_t>(p)];
  }
  whet::BasicRootInformation<Wide> root(names.size());
  root.fold(rows);
  const auto sigmas = root.sigmas();
  return {sigmas.data(), sigmas.data() + sigmas.size()};
}

/// Decimal digits that two wide numbers share, 0 to 50.
[[nodiscard]] inline double digits(const Wide& got, const Wide& wanted) {
  const Wide off = abs(got / wanted - 1);
  return off == 0 ? 50.0 : std::max(0.0, -static_cast<double>(log10(off)));
}

}  // namespace nist

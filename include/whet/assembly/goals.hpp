#pragma once
/// Which derivative matters to the forecast as a whole, and how sharp it must become.

#include <algorithm>
#include <cmath>
#include <limits>
#include <vector>

#include <Eigen/Core>

#include <whet/assembly/options.hpp>
#include <whet/information/constraints.hpp>
#include <whet/information/information.hpp>
#include <whet/information/sigma_errors.hpp>

namespace whet::detail {

/// What the errors of an experiment's own derivatives do to a forecast.
struct Goals {
  /// P: the size of error allowed for each column; infinity where it is good enough.
  Eigen::VectorXd sizes{};
  /// P: how many times too large the error of each column is, <= 1 where it is good enough;
  /// infinite where it carries a direction that is not measured.
  Eigen::VectorXd excess{};
  /// The largest numerical error of a sigma, relative to it.
  double reached{0.0};
  /// A direction is not measured above the errors.
  bool unmeasured{false};
};

/// @param own  the experiment's information, source p the error of its column p; `options.given` is
///   joined to it for the whole
[[nodiscard]] inline Goals goals_of(const Information& own, const InformationOptions& options) {
  const double infinity = std::numeric_limits<double>::infinity();
  const Information whole = options.given.joined_to(own);
  const RootInformation& root = whole.parts().root;
  const NumericalErrors errors = root.errors();
  const Constraints<double> solved =
      solve<double>(root.root_with_shifts(), root.parameters(), errors);
  const SigmaErrors bounds = sigma_errors(solved, errors);

  const Eigen::Index count = own.parameters().size();
  Goals goals{Eigen::VectorXd::Constant(count, infinity), Eigen::VectorXd::Zero(count), 0.0,
              solved.null.size() > 0};
  // What the own sources do to a sum that is allowed to be so large: each gets an even share, those
  // that hardly count left out.
  const auto share = [&](const Eigen::VectorXd& effects, double allowed) {
    const double own_sum = effects.head(count).sum();
    const double others = effects.sum() - own_sum;
    allowed = std::max(allowed - others, 0.5 * allowed);  // what is given cannot be improved here
    if (own_sum <= allowed) return;
    const double counts = allowed / (5.0 * static_cast<double>(count));
    double sharing = 0.0, rest = 0.0;
    for (Eigen::Index p = 0; p < count; ++p) {
      (effects(p) > counts ? sharing : rest) += effects(p) > counts ? 1.0 : effects(p);
    }
    goals.excess = goals.excess.cwiseMax(effects.head(count) * sharing / (allowed - rest));
  };
  // Independent noise of the own derivatives adds its square to F; see assemble().
  const bool scattered = !own.parts().root.errors().matrices.empty();
  for (Eigen::Index a = 0; a < solved.sigmas.size(); ++a) {
    const double sigma = solved.sigmas(a);
    if (!(sigma < infinity)) continue;
    goals.reached = std::max(goals.reached, bounds.sizes(a) / sigma);
    share(bounds.columns.on_sigmas.col(a), 0.8 * options.accuracy * sigma);
    if (scattered) {
      share(bounds.matrices.front().on_sigmas.col(a), std::sqrt(0.2 * options.accuracy) * sigma);
    }
  }
  // The higher orders add eta^2 to every sigma: a tenth of what is allowed.
  share(bounds.columns.parts, std::sqrt(0.1 * std::min(options.accuracy, 1.0)));

  // While a direction is not measured, its errors are made smaller until they are known to stay.
  for (Eigen::Index k = 0; k < solved.null.size(); ++k) {
    const double bound = solved.null.bounds[static_cast<std::size_t>(k)];
    for (Eigen::Index p = 0; p < count; ++p) {  // source p is the error of the own column p
      const double size =
          errors.columns.sizes(p) + (scattered ? errors.matrices.front().sizes(p) : 0.0);
      if (size * std::abs(solved.null.directions(p, k)) > 0.1 * bound) goals.excess(p) = infinity;
    }
  }
  for (Eigen::Index p = 0; p < count; ++p) {
    if (goals.excess(p) <= 1.0) continue;
    goals.sizes(p) =
        errors.columns.sizes(p) / (goals.excess(p) < infinity ? goals.excess(p) : 10.0);
  }
  return goals;
}

}  // namespace whet::detail

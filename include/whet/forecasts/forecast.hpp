#pragma once
/// What an information says of the parameters: standard deviations, correlations, biases, and how
/// far the numbers themselves can be trusted.

#include <cmath>
#include <limits>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/derivatives/differentiate.hpp>
#include <whet/forecasts/confidence.hpp>
#include <whet/information/constraints.hpp>
#include <whet/information/information.hpp>
#include <whet/information/sigma_errors.hpp>

namespace whet {

/// A direction of parameter space that the data do not measure above the numerical error: moving
/// all its parameters together, in these proportions, changes nothing that is seen.
struct UnconstrainedDirection {
  struct Part {
    std::string name{};
    /// How far this parameter moves along, in units of its conditional sigma (the largest is 1 or
    /// -1), or in its own unit where nothing measures it at all.
    double weight{};
  };
  /// The parts above a thousandth of the largest, largest first.
  std::vector<Part> parts{};
  /// The others' sigmas hold if the direction is exactly null; and to 2 f^2 if it is known from
  /// elsewhere to f times this many of the units above, f < 1: beyond, the errors of what is taken
  /// as null would show. Infinite for a column of zeros.
  double holds_to{};
};

namespace detail {

/// The gradient of a number that depends on the parameters, at the fiducial point.
template <class F>
[[nodiscard]] Eigen::VectorXd gradient_of(const Parameters& parameters, const F& quantity) {
  const auto vector = [&quantity](const auto& at) { return std::vector{quantity(at)}; };
  if constexpr (has_exact_derivatives<F>) {
    return differentiate(parameters, exact(vector)).values().row(0).transpose();
  } else {
    const Derivatives gradient = differentiate(parameters, vector, {.accuracy = 1e-10});
    refuse_kinks("derived_sigma", gradient);
    return gradient.values().row(0).transpose();
  }
}

/// "inner - 0.98 outer".
[[nodiscard]] inline std::string in_words(const UnconstrainedDirection& direction) {
  std::string words;
  for (const UnconstrainedDirection::Part& part : direction.parts) {
    const double size = std::abs(part.weight);
    words += words.empty() ? (part.weight < 0.0 ? "-" : "") : (part.weight < 0.0 ? " - " : " + ");
    if (std::abs(size - 1.0) > 5e-3) words += text(size, 2) + " ";
    words += part.name;
  }
  return words;
}

}  // namespace detail

/// The forecast made from an information. It solves once, when it is made; what is asked of it is
/// then read off. An immutable value.
class Forecast {
 public:
  explicit Forecast(Information information)
      : information_(std::move(information)),
        solved_(
            detail::solve<double>(root().root_with_shifts(), root().parameters(), root().errors())),
        errors_(detail::sigma_errors(solved_, root().errors())) {}

  [[nodiscard]] const Information& information() const noexcept { return information_; }
  [[nodiscard]] const Parameters& parameters() const noexcept { return information_.parameters(); }

  /// The forecast standard deviation of a parameter, all others integrated out, in its unit: by the
  /// Cramer-Rao inequality a lower bound for unbiased estimates. Infinite where the parameter has a
  /// part in an unconstrained direction.
  /// @throws ParameterError on a name that is not there, as everything below
  [[nodiscard]] double sigma(std::string_view name) const { return solved_.sigmas(index(name)); }

  /// The standard deviation of a parameter if all others were known, in its unit; infinite where
  /// nothing shows above the numerical error even then.
  [[nodiscard]] double conditional_sigma(std::string_view name) const {
    const Eigen::Index place = index(name);
    const double norm = detail::column_norms<double>(root().root())(place);
    const double error = root().errors().bound(Eigen::VectorXd::Unit(parameters().size(), place));
    return norm > error ? 1.0 / norm : std::numeric_limits<double>::infinity();
  }

  /// A bound on the error of sigma(name) from the errors of the derivatives, noise, rounding and
  /// printed digits, in its unit; an unconstrained direction is taken to do nothing at all, as the
  /// notes say. Infinite where there is no bound; the notes say which derivatives
  /// to improve. Zero where sigma is infinite.
  [[nodiscard]] double numerical_error(std::string_view name) const {
    return errors_.sizes(index(name));
  }

  /// @throws ParameterError as well for a parameter without a finite sigma
  [[nodiscard]] double covariance(std::string_view a, std::string_view b) const {
    return half_row(a).dot(half_row(b));
  }
  [[nodiscard]] double correlation(std::string_view a, std::string_view b) const {
    const Eigen::VectorXd x = half_row(a), y = half_row(b);
    return a == b ? 1.0 : x.dot(y) / x.norm() / y.norm();
  }
  /// The covariance matrix C, P x P, in the order of the parameters; rows and columns of parameters
  /// without a finite sigma hold infinity on the diagonal and zero elsewhere.
  [[nodiscard]] Eigen::MatrixXd covariance() const {
    Eigen::MatrixXd matrix =
        detail::product<double>(solved_.half, detail::transposed<double>(solved_.half));
    for (Eigen::Index i = 0; i < matrix.rows(); ++i) {
      if (solved_.measured(i)) continue;
      matrix.row(i).setZero();
      matrix.col(i).setZero();
      matrix(i, i) = std::numeric_limits<double>::infinity();
    }
    return matrix;
  }

  /// The confidence ellipse of two parameters, all others integrated out.
  [[nodiscard]] Ellipse ellipse(std::string_view x, std::string_view y, Confidence level) const {
    const auto [l11, l21, l22] = root_of_pair(x, y);
    Ellipse ellipse = detail::ellipse_of(l11, l21, l22, level.delta_chi_squared());
    ellipse.centre_x = parameters()[x].fiducial;
    ellipse.centre_y = parameters()[y].fiducial;
    return ellipse;
  }

  /// 1 / sqrt(det C) of two parameters, all others integrated out, in 1 / (unit times unit); zero
  /// where one of them is not measured.
  [[nodiscard]] double figure_of_merit(std::string_view a, std::string_view b) const {
    if (!solved_.measured(index(a)) || !solved_.measured(index(b))) return 0.0;
    const auto [l11, l21, l22] = root_of_pair(a, b);
    return 1.0 / (l11 * l22);
  }

  /// The directions that are not measured above the numerical error; empty where all are.
  [[nodiscard]] std::vector<UnconstrainedDirection> unconstrained_directions() const {
    std::vector<UnconstrainedDirection> directions;
    const Eigen::VectorXd norms = detail::column_norms<double>(root().root());
    for (Eigen::Index k = 0; k < solved_.null.size(); ++k) {
      Eigen::VectorXd weights = solved_.null.directions.col(k);
      for (Eigen::Index p = 0; p < weights.size(); ++p) {
        if (norms(p) > 0.0) weights(p) *= norms(p);
      }
      Eigen::Index first = 0;
      const double largest = weights.cwiseAbs().maxCoeff(&first);
      weights /= weights(first);
      UnconstrainedDirection direction;
      direction.holds_to = largest / solved_.null.bounds[static_cast<std::size_t>(k)];
      for (Eigen::Index p = first; std::abs(weights(p)) > 1e-3;) {
        direction.parts.push_back({parameters()[p].name, weights(p)});
        weights(p) = 0.0;
        weights.cwiseAbs().maxCoeff(&p);
      }
      directions.push_back(std::move(direction));
    }
    return directions;
  }

  /// The standard deviation of a quantity q(theta) to first order: sqrt(g^T C g), g its gradient at
  /// the fiducial point; infinite where it depends on an unconstrained direction.
  /// @param quantity  a function from a point to a number, best marked `exact`
  template <class F>
  [[nodiscard]] double derived_sigma(const F& quantity) const {
    const Eigen::VectorXd gradient = detail::gradient_of(parameters(), quantity);
    const double sigma = (solved_.half.transpose() * gradient).norm();
    const double rounding =
        static_cast<double>(gradient.size()) * std::numeric_limits<double>::epsilon();
    for (Eigen::Index k = 0; k < solved_.null.size(); ++k) {
      const Eigen::VectorXd parts = gradient.cwiseProduct(solved_.null.directions.col(k));
      const double bound = solved_.null.bounds[static_cast<std::size_t>(k)];
      if (std::abs(parts.sum()) > sigma * bound + rounding * parts.cwiseAbs().sum()) {
        return std::numeric_limits<double>::infinity();
      }
    }
    return sigma;
  }

  /// The bias of a parameter, fitted minus true, in its unit, when the data are shifted by a
  /// systematic that the model ignores (to first order: F^-1 J^T C^-1 d).
  /// @param shift  the name of a shift given to `expected_information`
  /// @throws ParameterError for an unknown shift, or a parameter without a finite sigma
  [[nodiscard]] double bias(std::string_view name, std::string_view shift) const {
    const auto& shifts = information_.parts().shifts;
    const auto place = std::find(shifts.begin(), shifts.end(), shift);
    if (place == shifts.end()) {
      detail::fail<ParameterError>(
          {.where = "bias",
           .what = "shift " + detail::in_quotes(shift) + ": not among " +
                   (shifts.empty() ? std::string("the shifts: there are none")
                                   : detail::listed(shifts)),
           .advice = "Give it to expected_information: {.shifts = {{\"name\", data}}}."});
    }
    const Eigen::Index count = parameters().size();
    return half_row(name).dot(solved_.root.col(count + (place - shifts.begin())).head(count));
  }

  /// What weakens this forecast, in sentences: from the information, and of the numbers themselves.
  [[nodiscard]] std::vector<std::string> notes() const {
    std::vector<std::string> all = information_.notes();
    const NumericalErrors errors = root().errors();
    bool resolved = true;
    Eigen::Index k = 0;
    for (const UnconstrainedDirection& direction : unconstrained_directions()) {
      if (errors.columns.unresolved(solved_.null.directions.col(k++))) {
        resolved = false;
        all.push_back(
            "the derivatives along " + detail::in_words(direction) +
            " are all error: it may matter as much as any, so no sigma has a bound on its "
            "numerical error; make the code quieter, or add a prior");
        continue;
      }
      const bool alone = direction.parts.size() == 1;
      std::string note = "not measured: " + detail::in_words(direction) +
                         (alone ? "" : " (in units of their conditional sigmas)");
      // Where more is known of it from elsewhere than the errors exclude, it is no longer null.
      if (direction.holds_to < 1e6) {
        note += "; the finite sigmas take it to do nothing, which is known to 1/" +
                detail::text(direction.holds_to, 2) + " a unit";
      }
      all.push_back(std::move(note));
    }
    if (resolved && errors_.sizes.size() > 0 &&
        errors_.sizes.maxCoeff() == std::numeric_limits<double>::infinity()) {
      all.push_back(
          "no bound on the numerical errors: those of the derivatives, or of the digits that a "
          "matrix came with, exceed what is resolved" +
          worst_source() + "; improve them, or add a prior");
    }
    return all;
  }

 private:
  [[nodiscard]] const RootInformation& root() const noexcept { return information_.parts().root; }
  [[nodiscard]] Eigen::Index index(std::string_view name) const {
    return parameters().table()->index("Forecast", name);
  }

  /// ", most of all by "h"": where the largest error source enters; nothing if it was integrated
  /// out.
  [[nodiscard]] std::string worst_source() const {
    const NumericalErrors errors = root().errors();
    const Eigen::VectorXd norms = detail::column_norms<double>(root().root());
    double worst = 0.0;
    std::string words;
    const auto look = [&](const ErrorSources& sources, const Eigen::VectorXd& parts) {
      for (Eigen::Index q = 0; q < parts.size(); ++q) {
        if (!(parts(q) > worst)) continue;
        worst = parts(q);
        double largest = 0.0;
        words.clear();
        for (Eigen::Index p = 0; p < norms.size(); ++p) {
          const double part = std::abs(sources.rows(q, p)) * norms(p);
          if (!(part > largest)) continue;
          largest = part;
          words = ", most of all by " + detail::in_quotes(parameters()[p].name);
        }
      }
    };
    look(errors.columns, errors_.columns.parts);
    for (std::size_t m = 0; m < errors.matrices.size(); ++m) {
      look(errors.matrices[m], errors_.matrices[m].parts);
    }
    return words;
  }

  /// Row a of A, C = A A^T, for a parameter that has a finite sigma.
  [[nodiscard]] Eigen::VectorXd half_row(std::string_view name) const {
    const Eigen::Index place = index(name);
    if (!solved_.measured(place)) {
      detail::fail<ParameterError>(
          {.where = "Forecast",
           .what = "parameter " + detail::in_quotes(name),
           .got = "an infinite sigma",
           .expected = "a parameter that is measured",
           .advice = "See unconstrained_directions(); a prior or another probe can fix it."});
    }
    Eigen::VectorXd row(solved_.half.cols());
    for (Eigen::Index p = 0; p < row.size(); ++p) row(p) = solved_.half(place, p);
    return row;
  }

  struct PairRoot {
    double l11, l21, l22;
  };
  /// The lower-triangular root of the covariance of two parameters: no difference of large numbers.
  [[nodiscard]] PairRoot root_of_pair(std::string_view a, std::string_view b) const {
    if (index(a) == index(b)) {
      detail::fail<ParameterError>({.where = "Forecast",
                                    .what = "the two parameters",
                                    .got = detail::in_quotes(a) + " twice",
                                    .expected = "two different ones"});
    }
    const Eigen::VectorXd first = half_row(a);
    Eigen::VectorXd second = half_row(b);
    const double l11 = first.norm(), l21 = second.dot(first) / l11;
    for (Eigen::Index p = 0; p < second.size(); ++p) second(p) -= l21 / l11 * first(p);
    return {l11, l21, second.norm()};
  }

  Information information_;
  detail::Constraints<double> solved_;
  detail::SigmaErrors errors_;
};

}  // namespace whet

#pragma once
/// Derivatives checked against differences of the observable.

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>
#include <string>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/derivatives/derivatives.hpp>
#include <whet/evaluation/evaluation.hpp>
#include <whet/observables/observable.hpp>
#include <whet/parameters/parameters.hpp>
#include <whet/parameters/point.hpp>
#include <whet/support/error.hpp>
#include <whet/support/text.hpp>

namespace whet {

namespace detail {

/// Compares given derivatives with differences of the observable; see `confirmed`.
class Confirmation {
 public:
  Confirmation(const Derivatives& derivatives, ObservableRef observable)
      : given_(derivatives), observable_(observable), errors_(derivatives.errors()) {}

  [[nodiscard]] Derivatives run() {
    const Eigen::Index count = given_.parameters().size();
    auto parts = given_.parts();
    mean_ = call(Point<double>(given_.parameters()), "at the fiducial point");
    check_mean();
    for (Eigen::Index p = 0; p < count; ++p) {
      const int before = evaluations_;
      DerivativeReport& report = parts.reports[static_cast<std::size_t>(p)];
      confirm(p, report);
      report.evaluations += evaluations_ - before;
    }
    parts.evaluations += evaluations_;
    parts.rounds += 1;
    return Derivatives(std::move(parts));
  }

 private:
  using Pair = std::array<double, 2>;

  /// Differences by one parameter at one step against the derivatives given.
  struct Comparison {
    Eigen::VectorXd difference;  ///< n, what the differences say
    Eigen::VectorXd slope;       ///< n, the largest change per unit of the parameter
    Eigen::VectorXd rounding;    ///< n, what rounding may have done to `difference`
  };

  [[nodiscard]] Eigen::VectorXd call(const Point<double>& at, const std::string& where) {
    ++evaluations_;
    Evaluation evaluation = evaluate(observable_, at, given_.labels());
    if (evaluation.failed()) {
      fail<ObservableError>(
          {.where = "confirmed",
           .what = "the observable failed " + where,
           .got = evaluation.failure,
           .advice = "Say by lower and upper where the domain of the code ends."});
    }
    if (evaluation.data.size() != given_.mean().size()) {
      fail<ObservableError>({.where = "confirmed",
                             .what = "length of the data vector " + where,
                             .got = text(evaluation.data.size()),
                             .expected = text(given_.mean().size())});
    }
    return std::move(evaluation.data);
  }

  void check_mean() const {
    double largest = 0.0;
    for (Eigen::Index i = 0; i < mean_.size(); ++i) largest = std::max(largest, std::abs(mean_(i)));
    for (Eigen::Index i = 0; i < mean_.size(); ++i) {
      const double tolerance = 1e-6 * std::abs(mean_(i)) + 1e-12 * largest;
      if (std::abs(given_.mean()(i) - mean_(i)) <= tolerance) continue;
      fail<DerivativeError>({.where = "confirmed",
                             .what = "mean, " + element_name(i, given_.labels()),
                             .got = text(given_.mean()(i)),
                             .expected = text(mean_(i)) + ", as the observable gives",
                             .advice = "The derivatives belong to another observable or point."});
    }
  }

  /// A step for the change over which the model bends: given, or what is known of it.
  [[nodiscard]] double scale(Eigen::Index p) const {
    const Parameter& parameter = given_.parameters()[p];
    if (parameter.scale > 0.0) return parameter.scale;
    if (parameter.fiducial != 0.0) return std::abs(parameter.fiducial);
    if (std::isfinite(parameter.upper - parameter.lower)) return parameter.upper - parameter.lower;
    double shortest = std::numeric_limits<double>::infinity();
    for (Eigen::Index i = 0; i < mean_.size(); ++i) {
      const double length = std::abs(mean_(i) / given_.values()(i, p));
      if (length > 0.0) shortest = std::min(shortest, length);
    }
    if (std::isfinite(shortest)) return shortest;
    fail<ParameterError>({.where = "confirmed",
                          .what = "parameter " + in_quotes(parameter.name),
                          .got = "a fiducial value of 0 and no scale",
                          .advice = "Give its scale: nothing else says how far to step."});
  }

  /// Two unequal displacements of about one step, on both sides where the bounds leave room. At
  /// equal ones a kink would hide: |t| has an even difference of zero.
  [[nodiscard]] Pair displacements(Eigen::Index p, double step) const {
    const double above = room(p, 1.0), below = room(p, -1.0);
    if (above >= step && below >= step / 2) return {step, -step / 2};
    if (above >= step / 2 && below >= step) return {-step, step / 2};
    const double farthest = std::min(std::max(above, below), step);
    return above >= below ? Pair{farthest, farthest / 2} : Pair{-farthest, -farthest / 2};
  }

  /// The same longer or shorter, as far as the bounds leave room for both: a pair that lost a side
  /// would no longer see a kink.
  [[nodiscard]] Pair stretched(Eigen::Index p, const Pair& t, double factor) const {
    for (const double displacement : t) {
      factor = std::min(factor, room(p, displacement) / std::abs(displacement));
    }
    return {factor * t[0], factor * t[1]};
  }

  /// How far the domain goes on from the fiducial value in the direction of that sign.
  [[nodiscard]] double room(Eigen::Index p, double sign) const {
    const Parameter& parameter = given_.parameters()[p];
    return sign > 0.0 ? parameter.upper - parameter.fiducial : parameter.fiducial - parameter.lower;
  }

  [[nodiscard]] Comparison compare(Eigen::Index p, Pair t) {
    const Parameter& parameter = given_.parameters()[p];
    const double x = parameter.fiducial;
    Pair at{};  // not x + t: that may round to beyond a bound
    for (std::size_t k = 0; k < 2; ++k) {
      at[k] = std::clamp(x + t[k], parameter.lower, parameter.upper);
      t[k] = at[k] - x;
    }
    // The derivative at 0 of the parabola through (0, 0), (t_0, d_0), (t_1, d_1).
    const Pair weights{-t[1] / (t[0] * (t[0] - t[1])), -t[0] / (t[1] * (t[1] - t[0]))};
    const double epsilon = 10 * std::numeric_limits<double>::epsilon();
    Comparison result{Eigen::VectorXd::Zero(mean_.size()), Eigen::VectorXd::Zero(mean_.size()),
                      Eigen::VectorXd::Zero(mean_.size())};
    for (std::size_t k = 0; k < 2; ++k) {
      std::vector<double> values = Point<double>(given_.parameters()).values();
      values[static_cast<std::size_t>(p)] = at[k];
      const Eigen::VectorXd data = call(Point<double>(given_.parameters(), std::move(values)),
                                        "at " + in_quotes(parameter.name) + " = " + text(at[k]));
      const double rounding = epsilon * std::abs(weights[k]);
      for (Eigen::Index i = 0; i < mean_.size(); ++i) {
        const double change = data(i) - mean_(i);
        result.difference(i) += weights[k] * change;
        result.slope(i) = std::max(result.slope(i), std::abs(change / t[k]));
        // Of the data, and of the argument inside the code.
        result.rounding(i) += rounding * (std::abs(data(i)) + std::abs(mean_(i)));
        result.rounding(i) += rounding * std::abs(x) * result.slope(i);
      }
    }
    return result;
  }

  void confirm(Eigen::Index p, DerivativeReport& report) {
    const Parameter& parameter = given_.parameters()[p];
    const double x = std::abs(parameter.fiducial);
    const double step = std::max(1e-4 * scale(p), 1e-9 * x);
    const Eigen::VectorXd values = given_.values().col(p);

    const Pair t = displacements(p, step);
    const Comparison first = compare(p, t);
    const auto off = [&](const Comparison& by, Eigen::Index i) {
      return std::abs(by.difference(i) - values(i));
    };
    const auto allowed = [&](Eigen::Index i) {
      return 1e-3 * std::max(std::abs(values(i)), first.slope(i)) + errors_(i, p);
    };
    std::vector<Eigen::Index> open;  // elements in doubt
    bool idle = true, seen = false;
    for (Eigen::Index i = 0; i < values.size(); ++i) {
      const double tolerance = allowed(i) + first.rounding(i);
      if (off(first, i) > tolerance) open.push_back(i);
      idle = idle && values(i) == 0.0;
      seen = seen || std::abs(values(i)) > 2.0 * tolerance;
    }
    // Truncation goes with a shorter step, noise with a longer one; a wrong derivative stays.
    for (const double factor : {1.0 / 64, 16.0}) {
      if (open.empty()) break;
      const Comparison again = compare(p, stretched(p, t, factor));
      std::erase_if(open, [&](Eigen::Index i) {
        return off(again, i) <= allowed(i) + again.rounding(i) &&
               off(again, i) + again.rounding(i) <= 0.25 * off(first, i);
      });
    }
    if (!open.empty()) {
      const Eigen::Index i = open.front();
      fail<DerivativeError>({.where = "confirmed",
                             .what = "parameter " + in_quotes(parameter.name) + ", derivative of " +
                                     element_name(i, given_.labels()),
                             .got = text(values(i)),
                             .expected = text(first.difference(i), 6) + " within " +
                                         text(allowed(i) + first.rounding(i), 2) +
                                         " by differences at a step of " + text(step, 2),
                             .advice = "Either the derivative is wrong, or the observable has a "
                                       "kink, jump or noise there."});
    }
    if (!idle && !seen) {
      report.note += std::string(report.note.empty() ? "" : "; ") +
                     "not confirmed: rounding hides a step of " + text(step, 2);
    }
  }

  const Derivatives& given_;
  ObservableRef observable_;
  Eigen::MatrixXd errors_;
  Eigen::VectorXd mean_{};
  int evaluations_{0};
};

}  // namespace detail

/// The same derivatives once the observable has confirmed them, with the calls that it took.
///
/// One call at the fiducial point and two for each parameter, at a step of 1e-4 of its scale
/// (given, or |fiducial|, or the range of its bounds) on one side and half of it on the other (on
/// one side alone where a bound leaves no room). They give a derivative of second order in the
/// step; where it differs from the one given by more than 1e-3, the given error and rounding, a
/// step 64 times shorter and one 16 times longer tell truncation and noise, which go, from a
/// disagreement, which stays.
///
/// Catches: a wrong sign, unit or factor (1.01 is seen), the derivative by another parameter, a
/// mean of another model, and a kink or jump at the fiducial point, where a dual number takes one
/// branch in silence. Cannot catch: an error below 1e-3 of the derivative or below the rounding of
/// the element over the step, a jump below 1e-6 of the data, a kink on a bound, a kink or wiggle
/// elsewhere than the fiducial point, and what the observable itself does wrong. Where rounding
/// hides a whole column, its report says so. Noise of the code is no disagreement up to
/// 1e-8 of |derivative| * scale; from 1e-7 on it is more and more often taken for one: confirm the
/// derivatives of a noisy code by `differentiate`.
/// @param derivatives  exact ones, or ones made elsewhere, with their errors
/// @param observable   what they are the derivatives of, called in double
/// @throws DerivativeError naming parameter and element, both values and the tolerance
/// @throws ObservableError where a call fails, or returns another length
/// @throws ParameterError where a fiducial value is 0 and nothing says how far to step
template <class F>
[[nodiscard]] Derivatives confirmed(const Derivatives& derivatives, const F& observable) {
  if constexpr (detail::require_observable<F>()) {
    const auto call = [&](const Point<double>& at) { return detail::to_vector(observable(at)); };
    return detail::Confirmation(derivatives, call).run();
  }
}

}  // namespace whet

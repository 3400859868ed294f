#pragma once
/// What one call of an observable gave, and the calls of a batch of points one after another.

#include <cmath>
#include <exception>
#include <span>
#include <string>
#include <vector>

#include <Eigen/Core>

#include <whet/parameters/point.hpp>
#include <whet/support/function_ref.hpp>
#include <whet/support/text.hpp>

namespace whet::detail {

/// The answer to one point: a data vector, or the reason why there is none.
struct Evaluation {
  Eigen::VectorXd data{};  ///< n, as the observable returned it; empty where it failed
  std::string failure{};   ///< the code's own words, or the element that is no number

  [[nodiscard]] bool failed() const noexcept { return !failure.empty(); }
};

/// An observable with its type put away: a point in, a data vector out; may throw.
using ObservableRef = FunctionRef<Eigen::VectorXd(const Point<double>&)>;

/// "element 3" or "element 3 (l = 40)".
[[nodiscard]] inline std::string element_name(Eigen::Index i,
                                              std::span<const std::string> labels = {}) {
  std::string name = "element " + text(i);
  if (i < static_cast<Eigen::Index>(labels.size())) {
    name += " (" + labels[static_cast<std::size_t>(i)] + ")";
  }
  return name;
}

/// Call the observable once. An exception, or an element that is not finite, is a failure in words.
/// @throws ParameterError where it asks for a parameter that is not there
[[nodiscard]] inline Evaluation evaluate(ObservableRef observable, const Point<double>& at,
                                         std::span<const std::string> labels = {}) {
  Evaluation evaluation;
  try {
    evaluation.data = observable(at);
  } catch (const ParameterError&) {
    throw;  // a name that the model misspells is no failure of a point
  } catch (const std::exception& error) {
    evaluation.failure = error.what();
    if (evaluation.failure.empty()) evaluation.failure = "an exception without a message";
    return evaluation;
  } catch (...) {
    evaluation.failure = "an exception that is no std::exception";
    return evaluation;
  }
  for (Eigen::Index i = 0; i < evaluation.data.size(); ++i) {
    if (std::isfinite(evaluation.data(i))) continue;
    evaluation.failure = element_name(i, labels) + " is " + text(evaluation.data(i));
    break;
  }
  return evaluation;
}

/// Call the observable at each point of a batch, in order.
[[nodiscard]] inline std::vector<Evaluation> evaluate_serially(
    ObservableRef observable, std::span<const Point<double>> batch,
    std::span<const std::string> labels = {}) {
  std::vector<Evaluation> answers;
  answers.reserve(batch.size());
  for (const Point<double>& at : batch) answers.push_back(evaluate(observable, at, labels));
  return answers;
}

}  // namespace whet::detail

#pragma once
/// The derivative engine: asks for points of all parameters in rounds, and is told the answers.

#include <cassert>
#include <limits>
#include <span>
#include <string>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/derivatives/derivative_column.hpp>
#include <whet/derivatives/derivatives.hpp>
#include <whet/derivatives/metric.hpp>
#include <whet/evaluation/evaluation.hpp>
#include <whet/parameters/parameters.hpp>
#include <whet/parameters/point.hpp>

namespace whet::detail {

/// Derivatives by all parameters, refined where and as far as its driver wants. It never calls the
/// observable: `next` gives a batch of points, evaluated anywhere, and `tell` takes the answers.
class DerivativeEngine {
 public:
  /// @param mean    n, the data vector at the fiducial point
  /// @param labels  names of the elements for messages, or none
  /// @param metric  what it refers to must outlive the engine
  DerivativeEngine(Parameters parameters, Eigen::VectorXd mean, std::vector<std::string> labels,
                   Metric metric, ColumnOptions options = {})
      : parameters_(std::move(parameters)), mean_(std::move(mean)), labels_(std::move(labels)) {
    columns_.reserve(static_cast<std::size_t>(parameters_.size()));
    for (const Parameter& p : parameters_) columns_.emplace_back(p, mean_, metric, options);
  }

  /// The next round: points of any parameters, to be evaluated in any order.
  /// @param goals  the size of error allowed for each column; infinity: leave it
  /// @return       empty where nothing is left to do or to gain
  /// @throws ObservableError naming a parameter at whose every step the observable failed
  [[nodiscard]] std::vector<Point<double>> next(const Eigen::VectorXd& goals) {
    assert(asked_.empty() && goals.size() == parameters_.size());
    std::vector<Point<double>> batch;
    const Point<double> fiducial(parameters_);
    for (Eigen::Index p = 0; p < parameters_.size(); ++p) {
      for (const double value : at(p).next(goals(p))) {
        std::vector<double> values = fiducial.values();
        values[static_cast<std::size_t>(p)] = value;
        batch.emplace_back(parameters_, std::move(values));
        asked_.push_back(p);
      }
    }
    return batch;
  }

  /// The answers to the last round, in its order.
  /// @throws ObservableError for a data vector of another length than at the fiducial point
  void tell(std::span<const Evaluation> answers) {
    assert(answers.size() == asked_.size());
    if (answers.empty()) return;
    for (std::size_t k = 0; k < answers.size(); ++k) {
      if (answers[k].failed() || answers[k].data.size() == mean_.size()) continue;
      fail<ObservableError>({.where = "derivatives",
                             .what = "parameter " + in_quotes(parameters_[asked_[k]].name) +
                                     ", moved: length of the data vector",
                             .got = text(answers[k].data.size()),
                             .expected = text(mean_.size()) + " as at the fiducial point",
                             .advice = "Return the same elements at every point."});
    }
    for (std::size_t start = 0; start < answers.size();) {
      std::size_t end = start;
      while (end < answers.size() && asked_[end] == asked_[start]) ++end;
      at(asked_[start]).tell(answers.subspan(start, end - start));
      start = end;
    }
    asked_.clear();
    evaluations_ += static_cast<int>(answers.size());
    ++rounds_;
  }

  /// The size of the error of column p now; infinity before there is one.
  [[nodiscard]] double error_size(Eigen::Index p) const { return at(p).error_size(); }
  /// The length of column p, by which a relative accuracy is measured.
  [[nodiscard]] double column_size(Eigen::Index p) const { return at(p).scale(); }
  /// False where more calls would not help: noise, a flat or kinked column, the budget.
  [[nodiscard]] bool can_improve(Eigen::Index p) const { return at(p).can_improve(); }
  [[nodiscard]] const Parameters& parameters() const noexcept { return parameters_; }

  /// All that is known now. Every column must have had its first round.
  [[nodiscard]] Derivatives derivatives() const {
    const Eigen::Index n = mean_.size(), count = parameters_.size();
    Derivatives::Parts parts{.parameters = parameters_,
                             .mean = mean_,
                             .values = Eigen::MatrixXd::Zero(n, count),
                             .truncation = Eigen::MatrixXd::Zero(n, count),
                             .noise = Eigen::MatrixXd::Zero(n, count),
                             .signs_known = true,
                             .labels = labels_,
                             .evaluations = evaluations_ + 1,  // and the fiducial point
                             .rounds = rounds_ + 1};
    for (Eigen::Index p = 0; p < count; ++p) {
      const ColumnError error = at(p).error();
      parts.values.col(p) = at(p).value();
      parts.truncation.col(p) = error.truncation;
      parts.noise.col(p) = error.noise;
      parts.reports.push_back(at(p).report());
    }
    return Derivatives(std::move(parts));
  }

 private:
  [[nodiscard]] DerivativeColumn& at(Eigen::Index p) {
    return columns_[static_cast<std::size_t>(p)];
  }
  [[nodiscard]] const DerivativeColumn& at(Eigen::Index p) const {
    return columns_[static_cast<std::size_t>(p)];
  }

  Parameters parameters_;
  Eigen::VectorXd mean_;
  std::vector<std::string> labels_;
  std::vector<DerivativeColumn> columns_;
  std::vector<Eigen::Index> asked_;  // the parameter of each point not yet answered
  int evaluations_{0}, rounds_{0};
};

}  // namespace whet::detail

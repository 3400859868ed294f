#pragma once
/// Where the numerical error of an information comes from.

#include <cmath>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/support/algebra.hpp>

namespace whet {

/// Columns of rows W that are known up to an error: column q is off by a vector of length at most
/// sizes(q), and enters the columns of today's parameters with the weights rows.row(q). The true
/// rows are W + sum_q d_q rows.row(q) with |d_q| <= sizes(q).
struct ErrorSources {
  Eigen::VectorXd sizes{};  ///< K, >= 0, in 1 / unit of the column's own parameter
  Eigen::MatrixXd rows{};   ///< K x P
  /// K, >= 0, in the unit of the column's own parameter: the part of the forecast error of that
  /// combination which was integrated out. Errors of higher order still feel it.
  Eigen::VectorXd hidden{};
  /// K: the length of the column itself when it was made; 0 where that is not known, or nothing
  /// moved. A column that is all error is no evidence that its parameter does nothing.
  Eigen::VectorXd lengths{};

  /// One source for each of P columns, of these lengths where they are known.
  [[nodiscard]] static ErrorSources of_columns(Eigen::VectorXd sizes,
                                               Eigen::VectorXd lengths = {}) {
    const Eigen::Index count = sizes.size();
    if (lengths.size() == 0) lengths = Eigen::VectorXd::Zero(count);
    return {std::move(sizes), Eigen::MatrixXd::Identity(count, count), Eigen::VectorXd::Zero(count),
            std::move(lengths)};
  }
  [[nodiscard]] static ErrorSources none(Eigen::Index parameters) {
    return {Eigen::VectorXd(0), Eigen::MatrixXd(0, parameters), Eigen::VectorXd(0),
            Eigen::VectorXd(0)};
  }

  /// The same errors after another linear change of the columns, J: P x P'.
  [[nodiscard]] ErrorSources through(const Eigen::MatrixXd& jacobian) const {
    return {sizes, detail::product<double>(rows, jacobian), hidden, lengths};
  }
  /// The same errors with some parameters integrated out.
  /// @param transfer  P x P', and `half`, P x N: see detail::IntegratedOut
  [[nodiscard]] ErrorSources without(const Eigen::MatrixXd& transfer,
                                     const Eigen::MatrixXd& half) const {
    return {sizes, detail::product<double>(rows, transfer), sigmas(half), lengths};
  }
  /// K: the forecast error of each combination rows.row(q), for C = half half^T.
  [[nodiscard]] Eigen::VectorXd sigmas(const Eigen::MatrixXd& half) const {
    const Eigen::MatrixXd parts = detail::product<double>(rows, half);
    Eigen::VectorXd all(sizes.size());
    for (Eigen::Index q = 0; q < all.size(); ++q) {
      all(q) = std::hypot(parts.row(q).norm(), hidden(q));
    }
    return all;
  }

  /// sum_q sizes(q) |rows.row(q) x|: how far |W x| can be off.
  [[nodiscard]] double bound(const Eigen::VectorXd& x) const {
    double sum = 0.0;
    const Eigen::MatrixXd parts = detail::product<double>(rows, x);
    for (Eigen::Index q = 0; q < sizes.size(); ++q) sum += sizes(q) * std::abs(parts(q, 0));
    return sum;
  }

  /// Does a column that is all error, above a tenth of its length, carry the direction x? Then x
  /// may matter as much as any, for all that is known.
  [[nodiscard]] bool unresolved(const Eigen::VectorXd& x) const {
    const double all = bound(x);
    const Eigen::MatrixXd parts = detail::product<double>(rows, x);
    for (Eigen::Index q = 0; q < sizes.size(); ++q) {
      const bool all_error = lengths(q) > 0.0 && sizes(q) > 0.1 * lengths(q);
      if (all_error && sizes(q) * std::abs(parts(q, 0)) > 0.1 * all) return true;
    }
    return false;
  }

  /// The squared norm over the sources of what each does to a parameter's own column.
  [[nodiscard]] Eigen::VectorXd of_each_column() const {
    Eigen::VectorXd squares = Eigen::VectorXd::Zero(rows.cols());
    for (Eigen::Index p = 0; p < rows.cols(); ++p) {
      for (Eigen::Index q = 0; q < rows.rows(); ++q) {
        const double part = sizes(q) * rows(q, p);
        squares(p) += part * part;
      }
    }
    return squares;
  }

  void append(const ErrorSources& others) {
    const Eigen::Index old = sizes.size(), more = others.sizes.size();
    sizes.conservativeResize(old + more);
    rows.conservativeResize(old + more, rows.cols());
    hidden.conservativeResize(old + more);
    sizes.tail(more) = others.sizes;
    rows.bottomRows(more) = others.rows;
    hidden.tail(more) = others.hidden;
    lengths.conservativeResize(old + more);
    lengths.tail(more) = others.lengths;
  }
};

/// All error sources of an information.
struct NumericalErrors {
  /// Errors of derivative columns.
  ErrorSources columns{};
  /// Errors of F itself, |x^T dF x| <= (sum_q sizes(q) |rows.row(q) x|)^2 for each entry: of
  /// information that came as a matrix; and what independent noise of derivatives adds to F by its
  /// own square, however little of it points along the rows.
  std::vector<ErrorSources> matrices{};

  [[nodiscard]] static NumericalErrors none(Eigen::Index parameters) {
    return {ErrorSources::none(parameters), {}};
  }
  [[nodiscard]] NumericalErrors through(const Eigen::MatrixXd& jacobian) const {
    return each([&](const ErrorSources& sources) { return sources.through(jacobian); });
  }
  [[nodiscard]] NumericalErrors without(const Eigen::MatrixXd& transfer,
                                        const Eigen::MatrixXd& half) const {
    return each([&](const ErrorSources& sources) { return sources.without(transfer, half); });
  }
  /// The same errors of rows multiplied by a factor.
  [[nodiscard]] NumericalErrors times(double factor) const {
    return each([&](const ErrorSources& sources) {
      return ErrorSources{sources.sizes * factor, sources.rows, sources.hidden / factor,
                          sources.lengths * factor};
    });
  }
  void append(const NumericalErrors& others) {
    columns.append(others.columns);
    matrices.insert(matrices.end(), others.matrices.begin(), others.matrices.end());
  }
  /// How far |W x| can be off along x, both kinds together.
  [[nodiscard]] double bound(const Eigen::VectorXd& x) const {
    double all = columns.bound(x);
    for (const ErrorSources& matrix : matrices) all += matrix.bound(x);
    return all;
  }
  /// The error of each parameter's own column: the norm over the sources.
  [[nodiscard]] Eigen::VectorXd of_each_column() const {
    Eigen::VectorXd squares = columns.of_each_column();
    for (const ErrorSources& matrix : matrices) squares += matrix.of_each_column();
    return squares.cwiseSqrt();
  }

 private:
  template <class Change>
  [[nodiscard]] NumericalErrors each(const Change& change) const {
    NumericalErrors changed{change(columns), {}};
    for (const ErrorSources& matrix : matrices) changed.matrices.push_back(change(matrix));
    return changed;
  }
};

}  // namespace whet

#pragma once
/// Information kept as a square root: rows in, R out, F = R^T R never formed on the way.

#include <algorithm>
#include <limits>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/information/error_sources.hpp>
#include <whet/information/null_space.hpp>
#include <whet/support/error.hpp>
#include <whet/support/householder.hpp>

namespace whet {

namespace detail {

/// What integrating out leaves: the root of the others, and how the others' errors hear of what
/// went.
template <class Real>
struct IntegratedOut {
  MatrixOf<Real> root{};
  /// P x P', the change of columns for error sources: [1; -R_nn^-1 R_nk], rows in the old order.
  Eigen::MatrixXd transfer{};
  /// P x N, the columns of C^(1/2) that go with the nuisance: [0; R_nn^-1], rows in the old order.
  Eigen::MatrixXd half{};
};

/// The indices 0 ... count - 1 that are not in `chosen`.
[[nodiscard]] inline std::vector<Eigen::Index> all_but(Eigen::Index count,
                                                       const std::vector<Eigen::Index>& chosen) {
  std::vector<Eigen::Index> rest;
  for (Eigen::Index i = 0; i < count; ++i) {
    if (std::find(chosen.begin(), chosen.end(), i) == chosen.end()) rest.push_back(i);
  }
  return rest;
}

/// Integrate out the columns `nuisance` among the first `count` of a root; further columns (shifts)
/// ride along. The nuisance columns go first, what they do not measure above the errors is taken as
/// null, and as many rows are dropped as they have rank: dropping one a column would lose
/// information that the others need.
template <class Real>
[[nodiscard]] IntegratedOut<Real> integrate_out(const MatrixOf<Real>& root, Eigen::Index count,
                                                const std::vector<Eigen::Index>& nuisance,
                                                const NumericalErrors& errors) {
  const std::vector<Eigen::Index> rest = all_but(count, nuisance);
  const auto out = static_cast<Eigen::Index>(nuisance.size());
  const auto kept = static_cast<Eigen::Index>(rest.size());
  const Eigen::Index riding = root.cols() - count;
  MatrixOf<Real> ordered(root.rows(), root.cols());
  ordered << columns_of<Real>(root, nuisance), columns_of<Real>(root, rest), root.rightCols(riding);
  MatrixOf<Real> triangle = root_of<Real>(ordered);

  Eigen::MatrixXd selection = Eigen::MatrixXd::Zero(count, out);
  for (Eigen::Index j = 0; j < out; ++j) selection(nuisance[static_cast<std::size_t>(j)], j) = 1.0;
  const NullSpace<Real> null =
      find_null_space<Real>(leading<Real>(triangle, out, out), errors.through(selection));
  // Fixing the null directions by rows of their own raises the rank to one a column, so that
  // exactly the rows of the nuisance, and those that fix it, are dropped.
  triangle = with_null_space_fixed<Real>(triangle, null);

  // [R_nn^-1, R_nn^-1 R_nk], the null directions held where they are.
  MatrixOf<Real> solved(out, out + kept);
  solved << MatrixOf<Real>::Identity(out, out), triangle.block(0, out, out, kept);
  solved = upper_solution<Real>(triangle, std::move(solved));
  solved -= product<Real>(null.directions, product<Real>(null.fixing, solved));
  IntegratedOut<Real> result{triangle.bottomRightCorner(kept + riding, kept + riding),
                             Eigen::MatrixXd::Zero(count, kept), Eigen::MatrixXd::Zero(count, out)};
  for (Eigen::Index j = 0; j < kept; ++j) {
    result.transfer(rest[static_cast<std::size_t>(j)], j) = 1.0;
  }
  for (Eigen::Index i = 0; i < out; ++i) {
    const Eigen::Index row = nuisance[static_cast<std::size_t>(i)];
    for (Eigen::Index j = 0; j < out; ++j) result.half(row, j) = static_cast<double>(solved(i, j));
    for (Eigen::Index j = 0; j < kept; ++j) {
      result.transfer(row, j) = -static_cast<double>(solved(i, out + j));
    }
  }
  return result;
}

}  // namespace detail

/// The square root R of an information matrix F = R^T R of P parameters: upper triangular, R_ii >=
/// 0 (square-root information form: Bierman 1977). Its condition number is that of R, not its
/// square. Columns of shifts (data offsets by a systematic) may ride along: whitened like the rows,
/// they give the bias of the parameters. The numerical errors of its columns are carried through
/// every operation. A value; Real is double or any wider real type.
template <class Real>
class BasicRootInformation {
 public:
  using Matrix = detail::MatrixOf<Real>;
  using Vector = detail::VectorOf<Real>;

  /// No information on P parameters, with room for a number of shifts.
  explicit BasicRootInformation(Eigen::Index parameters, Eigen::Index shifts = 0)
      : BasicRootInformation(Matrix::Zero(parameters + shifts, parameters + shifts), parameters,
                             NumericalErrors::none(parameters)) {}

  /// A root as it was kept.
  /// @param root  (P + S) x (P + S), upper triangular, diagonal >= 0, the shifts last
  /// @throws CovarianceError if it is not that
  [[nodiscard]] static BasicRootInformation from_root(Matrix root, Eigen::Index parameters,
                                                      NumericalErrors errors) {
    using std::isfinite;
    bool good = root.rows() == root.cols() && parameters >= 0 && parameters <= root.cols() &&
                errors.columns.rows.cols() == parameters;
    for (Eigen::Index j = 0; good && j < root.cols(); ++j) {
      for (Eigen::Index i = 0; good && i < root.rows(); ++i) {
        const Real element = root(i, j);
        good = i > j ? element == Real(0) : isfinite(element) && (i < j || element >= Real(0));
      }
    }
    if (!good) {
      detail::fail<CovarianceError>({.where = "RootInformation::from_root",
                                     .what = "the root",
                                     .got = "another matrix",
                                     .expected =
                                         "an upper triangle of finite numbers with a "
                                         "diagonal >= 0, one column a parameter and shift"});
    }
    return BasicRootInformation(std::move(root), parameters, std::move(errors));
  }

  /// Number of parameters, P, and of shifts, S.
  [[nodiscard]] Eigen::Index parameters() const noexcept { return parameters_; }
  [[nodiscard]] Eigen::Index shifts() const noexcept { return root_.cols() - parameters_; }

  /// Add whitened rows: F grows by rows^T rows. However many rows, the memory beyond them is a
  /// chunk that fits the cache; in pieces or at once, R is the same to rounding.
  /// @param rows  n x (P + S), 1 / unit of the parameter, then the shifts (no unit). A row-major
  ///   matrix is copied.
  /// @throws CovarianceError on another number of columns, or an element that is not finite
  void fold(const Eigen::Ref<const Matrix>& rows) {
    if (rows.cols() != root_.cols()) {
      detail::fail<CovarianceError>({.where = "RootInformation::fold",
                                     .what = "number of columns",
                                     .got = detail::text(rows.cols()),
                                     .expected = detail::text(root_.cols()),
                                     .advice = "Give one column a parameter, then one a shift."});
    }
    Matrix grown = root_;
    detail::fold_rows<Real>(grown, rows);
    // A NaN or infinity anywhere ends up in R: looking there spares a pass over the rows.
    using std::isfinite;
    for (Eigen::Index j = 0; j < root_.cols(); ++j) {
      for (Eigen::Index i = 0; i <= j; ++i) {
        if (!isfinite(grown(i, j))) refuse_not_finite(rows);
      }
    }
    root_ = std::move(grown);
  }

  /// Add errors that are known of the rows that were folded.
  void add(const NumericalErrors& errors) { errors_.append(errors); }

  /// Add all information of another root of the same parameters and shifts, with its errors.
  /// @throws CovarianceError if their numbers differ
  void merge(const BasicRootInformation& other) {
    NumericalErrors both = errors();
    fold(other.root_);
    both.append(other.errors());
    errors_ = std::move(both);
  }

  /// R, P x P, upper triangular with R_ii >= 0.
  [[nodiscard]] Matrix root() const { return root_.topLeftCorner(parameters_, parameters_); }
  /// R with its shifts: (P + S) x (P + S), upper triangular.
  [[nodiscard]] const Matrix& root_with_shifts() const noexcept { return root_; }
  /// F = R^T R, P x P, for looking at: nothing in whet computes from it.
  [[nodiscard]] Matrix matrix() const { return detail::transposed_product<Real>(root(), root()); }

  /// The errors of the columns: those added, or else the rounding of the fold.
  [[nodiscard]] NumericalErrors errors() const {
    if (errors_.columns.sizes.size() > 0 || !errors_.matrices.empty()) return errors_;
    const Vector norms = detail::column_norms<Real>(root());
    return {ErrorSources::of_columns(
                (norms * Real(8) * std::numeric_limits<Real>::epsilon()).template cast<double>()),
            {}};
  }

  /// The information on the others with these parameters integrated out (marginalised).
  [[nodiscard]] BasicRootInformation integrating_out(const std::vector<Eigen::Index>& which) const {
    const NumericalErrors before = errors();
    detail::IntegratedOut<Real> left =
        detail::integrate_out<Real>(root_, parameters_, which, before);
    return BasicRootInformation(std::move(left.root),
                                parameters_ - static_cast<Eigen::Index>(which.size()),
                                before.without(left.transfer, left.half));
  }

  /// The information on the others with these parameters held at their fiducial values.
  [[nodiscard]] BasicRootInformation holding(const std::vector<Eigen::Index>& which) const {
    const std::vector<Eigen::Index> rest = detail::all_but(root_.cols(), which);
    const std::vector<Eigen::Index> kept = detail::all_but(parameters_, which);
    const auto count = static_cast<Eigen::Index>(kept.size());
    const Eigen::MatrixXd identity = Eigen::MatrixXd::Identity(parameters_, parameters_);
    return BasicRootInformation(detail::root_of<Real>(detail::columns_of<Real>(root_, rest)), count,
                                errors().through(detail::columns_of<double>(identity, kept)));
  }

  /// The information on other parameters.
  /// @param jacobian  P x P', d old / d new
  [[nodiscard]] BasicRootInformation replacing(const Matrix& jacobian) const {
    Matrix rows(root_.rows(), jacobian.cols() + shifts());
    rows << detail::product<Real>(root_.leftCols(parameters_), jacobian), root_.rightCols(shifts());
    return BasicRootInformation(detail::root_of<Real>(rows), jacobian.cols(),
                                errors().through(jacobian.template cast<double>()));
  }

  /// k times the readings, time or area: R sqrt(k).
  [[nodiscard]] BasicRootInformation repeated(const Real& k) const {
    using std::sqrt;
    const Real factor = sqrt(k);
    return BasicRootInformation(root_ * factor, parameters_,
                                errors().times(static_cast<double>(factor)));
  }

  /// Forecast standard deviation of each parameter, all others integrated out; infinite for those
  /// with a part in a direction that is not measured above the errors.
  [[nodiscard]] Vector sigmas() const;

  /// ln det F = 2 sum ln R_ii; minus infinity where a diagonal element is zero.
  [[nodiscard]] Real log_determinant() const {
    using std::log;
    Real sum(0);
    for (Eigen::Index i = 0; i < parameters_; ++i) sum += log(root_(i, i));
    return Real(2) * sum;
  }

 private:
  BasicRootInformation(Matrix root, Eigen::Index parameters, NumericalErrors errors)
      : parameters_(parameters), root_(std::move(root)), errors_(std::move(errors)) {}

  [[noreturn]] static void refuse_not_finite(const Eigen::Ref<const Matrix>& rows) {
    using std::isfinite;
    for (Eigen::Index i = 0; i < rows.rows(); ++i) {
      for (Eigen::Index j = 0; j < rows.cols(); ++j) {
        if (isfinite(rows(i, j))) continue;
        detail::fail<CovarianceError>(
            {.where = "RootInformation::fold",
             .what = "row " + detail::text(i) + ", column " + detail::text(j),
             .got = detail::text(static_cast<double>(rows(i, j))),
             .expected = "a finite value"});
      }
    }
    detail::fail<CovarianceError>({.where = "RootInformation::fold",
                                   .what = "the root",
                                   .got = "an overflow",
                                   .expected = "rows whose squares are finite",
                                   .advice = "Give the parameter in a larger or smaller unit."});
  }

  Eigen::Index parameters_;
  Matrix root_;
  NumericalErrors errors_;
};

/// In double, what forecasts use.
using RootInformation = BasicRootInformation<double>;

}  // namespace whet

#include <whet/information/constraints.hpp>  // defines sigmas()

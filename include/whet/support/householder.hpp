#pragma once
/// The one factorisation of whet: rows are folded into an upper-triangular root by Householder
/// reflections (Householder 1958; tall and skinny: Demmel et al. 2012).

#include <algorithm>
#include <cmath>
#include <utility>

#include <Eigen/Core>

#include <whet/support/algebra.hpp>

namespace whet::detail {

/// Takes rows up into a root R, a chunk that fits the cache at a time: R of [R; rows].
///
/// Reflections are gathered in panels of a few columns and applied together to those right of them,
/// as I - V T V^T (Schreiber & Van Loan 1989). Householder is stable by columns, not by rows: a
/// light row on top of a heavy one is lost. So where column j of the chunk outweighs R_jj, the row
/// that is largest there changes places with row j of R first (Powell & Reid 1969; Cox & Higham
/// 1998). Each time R_jj grows by a factor, and it never shrinks: in a long stream that is rare.
template <class Real>
class RowFolder {
 public:
  /// @param root  R, n x n, R_ii >= 0, zero below the diagonal; stays so
  /// @param most  the number of rows of the largest chunk
  RowFolder(MatrixOf<Real>& root, Eigen::Index most)
      : root_(root), rows_(MatrixOf<Real>::Zero(padded(most), root.cols() + width - 1)) {}

  /// Fold one chunk.
  void fold(const Eigen::Ref<const MatrixOf<Real>>& chunk) {
    length_ = padded(chunk.rows());
    for (Eigen::Index j = 0; j < chunk.cols(); ++j) {
      rows_.col(j).head(chunk.rows()) = chunk.col(j);
      rows_.col(j).segment(chunk.rows(), length_ - chunk.rows()).setZero();
    }
    for (Eigen::Index first = 0; first < root_.cols();) {
      const Eigen::Index reduced = reduce_panel(first);
      for (Eigen::Index j = first + width; j < root_.cols(); ++j) apply_panel(first, reduced, j);
      first += reduced;
    }
  }

 private:
  static constexpr Eigen::Index width = 8;  ///< of a panel
  /// Numbers in a vector register. The chunk is filled up with rows of zeros to a multiple.
  static constexpr Eigen::Index lanes =
      std::max<Eigen::Index>(1, EIGEN_MAX_ALIGN_BYTES / sizeof(Real));
  using Weights = Eigen::Array<Real, width, 1>;

  static Eigen::Index padded(Eigen::Index rows) { return (rows + lanes - 1) / lanes * lanes; }
  static bool in_range(const Real& square) { return square > Real(1e-100) && square < Real(1e100); }
  Real* column(Eigen::Index j) { return rows_.data() + j * rows_.rows(); }

  /// Reflect columns first, first + 1, ... of the chunk onto the diagonal of R, those right of them
  /// within the panel along. Stops early at a column that needs another row on top, or a scale.
  /// @return how many were reflected, at least one
  Eigen::Index reduce_panel(Eigen::Index first) {
    using std::sqrt;
    constexpr double much = 100;  // a light row on top loses the root of this, one digit
    heads_.setZero();
    signs_.setOnes();
    factor_.setZero();
    const Eigen::Index end = std::min(first + width, root_.cols());
    Real scale = prepare(first);
    for (Eigen::Index j = first; j < end; ++j, scale = Real(1)) {
      const Eigen::Index k = j - first;
      const Weights along = products(first, j);
      const Real pivot = root_(j, j) * scale;
      const Real square = pivot * pivot;
      if (k > 0 && !(along(k) <= much * square && in_range(square + along(k)))) return k;
      if (along(k) == Real(0)) continue;
      const Real norm = sqrt(square + along(k));
      const Real head = pivot + norm;             // no cancellation, but R_jj = -norm:
      const Real size = Real(1) / (norm * head);  // its row is turned round
      root_(j, j) = norm / scale;
      for (Eigen::Index c = j + 1; c < end; ++c) {
        Real& top = root_(j, c);
        const Real weight = size * (head * top + along(c - first));
        top = weight * head - top;
        Real* const target = column(c);
        const Real* const source = column(j);
        for (Eigen::Index i = 0; i < length_; ++i) target[i] -= weight * source[i];
      }
      heads_(k) = head;
      signs_(k) = Real(-1);
      factor_(k, k) = size;
      for (Eigen::Index l = 0; l < k; ++l) {
        Real sum(0);
        for (Eigen::Index m = l; m < k; ++m) sum += along(m) * factor_(m, l);
        factor_(k, l) = -size * sum;
      }
    }
    return end - first;
  }

  /// Exchange row j of R with the row of the chunk that is largest in column j, if that is larger,
  /// and scale the column to where neither squares nor products over- or underflow.
  /// @return the scale, a power of two
  Real prepare(Eigen::Index j) {
    using std::abs;
    using std::frexp;
    using std::ldexp;
    Real* const below = column(j);
    Eigen::Index i = 0;
    for (Eigen::Index other = 1; other < length_; ++other) {
      if (abs(below[other]) > abs(below[i])) i = other;
    }
    if (abs(below[i]) > root_(j, j)) {
      const bool turn = below[i] < Real(0);
      for (Eigen::Index c = j; c < root_.cols(); ++c) {
        std::swap(root_(j, c), rows_(i, c));
        if (turn) root_(j, c) = -root_(j, c);
      }
    }
    const Real& pivot = root_(j, j);
    if (pivot == Real(0) || in_range(pivot * pivot)) return Real(1);
    int exponent = 0;
    (void)frexp(pivot, &exponent);
    const Real scale = ldexp(Real(1), -exponent);
    for (i = 0; i < length_; ++i) below[i] *= scale;
    return scale;
  }

  /// Apply the reflections of a panel of `reduced` columns to column j, right of it.
  void apply_panel(Eigen::Index first, Eigen::Index reduced, Eigen::Index j) {
    Eigen::Map<Weights> top(&root_(first, j));
    Weights along = products(first, j) + heads_ * top;
    for (Eigen::Index k = reduced; k < width; ++k) along(k) = Real(0);  // it may have overflowed
    Weights weights = factor_.col(0) * along(0);
    for (Eigen::Index k = 1; k < width; ++k) weights += factor_.col(k) * along(k);
    top = signs_ * top + heads_ * weights;
    subtract(column(first), rows_.rows(), weights, column(j), length_);
  }

  /// target -= panel * weights.
  static void subtract(const Real* panel, Eigen::Index stride, const Weights& weights, Real* target,
                       Eigen::Index length) {
    Real w[width];  // a copy that a store to the target cannot change: else it is no vector loop
    for (Eigen::Index k = 0; k < width; ++k) w[k] = weights(k);
    for (Eigen::Index i = 0; i < length; ++i) {
      Real sum = target[i];
      for (Eigen::Index k = 0; k < width; ++k) sum -= w[k] * panel[k * stride + i];
      target[i] = sum;
    }
  }

  /// The inner products of column j with those of the panel. Sums by register: a compiler must not
  /// reorder a plain sum.
  Weights products(Eigen::Index first, Eigen::Index j) {
    using Register = Eigen::Array<Real, lanes, 1>;
    using Load = Eigen::Map<const Register>;
    const Real* const panel = column(first);
    const Real* const x = column(j);
    const Eigen::Index stride = rows_.rows();
    Register sums[width];
    for (Register& sum : sums) sum.setZero();
    for (Eigen::Index i = 0; i < length_; i += lanes) {
      const Register part = Load(x + i);
      for (Eigen::Index k = 0; k < width; ++k) sums[k] += Load(panel + k * stride + i) * part;
    }
    Weights all = Weights::Zero();
    for (Eigen::Index k = 0; k < width; ++k) {
      for (Eigen::Index l = 0; l < lanes; ++l) all(k) += sums[k](l);
    }
    return all;
  }

  MatrixOf<Real>& root_;
  MatrixOf<Real> rows_;      ///< the chunk, column by column turned into vectors v of reflections
  Eigen::Index length_ = 0;  ///< its rows
  Weights heads_, signs_;    ///< of the panel: the element of v on the diagonal; -1 if R_jj turned
  Eigen::Array<Real, width, width> factor_;  ///< T^T
};

/// Fold rows into a root: R of [root; rows], R_ii >= 0, zero below the diagonal. R^T R grows by
/// rows^T rows without either being formed. Rows may differ in weight by any factor, in any order.
/// Elements are zero or between 1e-240 and 1e240 in size. A NaN or an infinity shows in R. Scaling
/// a column by a power of two scales that of R, without rounding while the lengths of columns stay
/// between 1e-50 and 1e50.
template <class Real>
void fold_rows(MatrixOf<Real>& root, const Eigen::Ref<const MatrixOf<Real>>& rows) {
  // A panel fits the first cache. Columns a power of two apart would evict one another.
  constexpr Eigen::Index most = 408;
  RowFolder<Real> folder(root, std::min(most, rows.rows()));
  for (Eigen::Index first = 0; first < rows.rows(); first += most) {
    folder.fold(rows.middleRows(first, std::min(most, rows.rows() - first)));
  }
}

}  // namespace whet::detail

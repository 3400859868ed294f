#pragma once
/// Random rows and informations with errors of a stated size, and the truth beside them.

#include <cmath>
#include <random>
#include <string>
#include <vector>

#include <Eigen/Cholesky>
#include <Eigen/Core>
#include <Eigen/QR>

#include <whet/information/information.hpp>

namespace whet::test {

using LongMatrix = Eigen::Matrix<long double, Eigen::Dynamic, Eigen::Dynamic>;
using LongVector = Eigen::Matrix<long double, Eigen::Dynamic, 1>;

/// Draws with a fixed seed.
class Draws {
 public:
  explicit Draws(unsigned seed) : engine_(seed) {}

  double uniform(double low, double high) {
    return std::uniform_real_distribution<double>(low, high)(engine_);
  }
  /// Uniform in the exponent.
  double decades(double low, double high) { return std::pow(10.0, uniform(low, high)); }
  int integer(int low, int high) { return std::uniform_int_distribution<int>(low, high)(engine_); }
  Eigen::MatrixXd normal(Eigen::Index rows, Eigen::Index cols) {
    Eigen::MatrixXd matrix(rows, cols);
    for (Eigen::Index j = 0; j < cols; ++j) {
      for (Eigen::Index i = 0; i < rows; ++i) matrix(i, j) = normal_(engine_);
    }
    return matrix;
  }

 private:
  std::mt19937_64 engine_;
  std::normal_distribution<double> normal_;
};

/// Parameters p0, p1, ... with fiducial values of one.
[[nodiscard]] inline Parameters named(Eigen::Index count, const std::string& prefix = "p") {
  std::vector<Parameter> list;
  for (Eigen::Index p = 0; p < count; ++p) {
    list.push_back({.name = prefix + std::to_string(p), .fiducial = 1.0});
  }
  return Parameters(list);
}

/// Information of rows, each column with an error of a size.
[[nodiscard]] inline Information information_of(const Parameters& parameters,
                                                const Eigen::MatrixXd& rows,
                                                const Eigen::VectorXd& sizes,
                                                std::vector<std::string> shifts = {}) {
  Information::Parts parts;
  parts.parameters = parameters;
  parts.root = RootInformation(parameters.size(), static_cast<Eigen::Index>(shifts.size()));
  parts.root.fold(rows);
  parts.root.add({ErrorSources::of_columns(sizes), {}});
  parts.shifts = std::move(shifts);
  return Information(std::move(parts));
}

/// The same where the rows are known to rounding.
[[nodiscard]] inline Information information_of(const Parameters& parameters,
                                                const Eigen::MatrixXd& rows,
                                                std::vector<std::string> shifts = {}) {
  const Eigen::VectorXd sizes =
      2e-15 * rows.leftCols(parameters.size()).colwise().norm().transpose();
  return information_of(parameters, rows, sizes, std::move(shifts));
}

/// sigma of each parameter in long double: rows scaled to unit columns, QR, columns scaled back.
[[nodiscard]] inline Eigen::VectorXd true_sigmas(const LongMatrix& rows) {
  const Eigen::Index count = rows.cols();
  const LongVector norms = rows.colwise().norm().transpose();
  LongMatrix scaled = LongMatrix::Zero(std::max(rows.rows(), count), count);
  for (Eigen::Index p = 0; p < count; ++p) scaled.col(p).head(rows.rows()) = rows.col(p) / norms(p);
  const Eigen::HouseholderQR<LongMatrix> qr(scaled);
  const LongMatrix half =
      qr.matrixQR().topRows(count).template triangularView<Eigen::Upper>().solve(
          LongMatrix::Identity(count, count));
  Eigen::VectorXd sigmas(count);
  for (Eigen::Index p = 0; p < count; ++p) {
    sigmas(p) = static_cast<double>(half.row(p).norm() / norms(p));
  }
  return sigmas;
}
[[nodiscard]] inline Eigen::VectorXd true_sigmas(const Eigen::MatrixXd& rows) {
  return true_sigmas(LongMatrix(rows.cast<long double>()));
}

/// sigmas of a Fisher matrix in long double.
[[nodiscard]] inline Eigen::VectorXd true_sigmas_of_matrix(const LongMatrix& matrix) {
  const LongVector scale = matrix.diagonal().cwiseSqrt().cwiseInverse();
  const LongMatrix scaled = scale.asDiagonal() * matrix * scale.asDiagonal();
  const LongMatrix covariance =
      scaled.ldlt().solve(LongMatrix::Identity(matrix.rows(), matrix.rows()));
  return covariance.diagonal().cwiseSqrt().cwiseProduct(scale).cast<double>();
}

}  // namespace whet::test

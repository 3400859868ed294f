// What the compile-time row compiles of the peer: Eigen in one include, and one QR.
#include <iostream>

#include <Eigen/Dense>

int main() {
  const Eigen::MatrixXd rows = Eigen::MatrixXd::Random(41, 2);
  const Eigen::HouseholderQR<Eigen::MatrixXd> qr(rows);
  const Eigen::MatrixXd root = qr.matrixQR().topRows(2).triangularView<Eigen::Upper>();
  std::cout << root << '\n';
}

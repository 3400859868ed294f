// expect: whet: an Observable must return an owning vector; write -> Eigen::VectorXd
#include <whet/derivatives/confirm.hpp>

int main() {
  const std::vector<double> cache{1.0};
  const auto cached = [&](const whet::Point<double>&) -> const std::vector<double>& {
    return cache;
  };
  const whet::Derivatives given(whet::Parameters{}, Eigen::VectorXd::Ones(1),
                                Eigen::MatrixXd(1, 0));
  (void)whet::confirmed(given, cached);
}

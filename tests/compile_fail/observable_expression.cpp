// expect: whet: an Observable must return an owning vector; write -> Eigen::VectorXd
#include <whet/observables/labelled.hpp>

int main() {
  const auto dangling = [](const whet::Point<double>& at) {
    return at["tilt"] * Eigen::VectorXd::Ones(3);
  };
  (void)whet::labelled(dangling, {"a", "b", "c"});
}

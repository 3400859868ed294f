// expect: whet: exact(f) needs f generic in its scalar: write [](const auto& at)
#include <whet/derivatives/exact_derivatives.hpp>

int main() {
  const auto forgetful = [](const auto&) { return std::vector<double>{1.0}; };
  const whet::Parameters parameters{{"tilt", 1.0}};
  (void)whet::detail::exact_derivatives(parameters, whet::exact(forgetful));
}

// expect: whet: exact(f) needs f generic in its scalar: write [](const auto& at)
#include <whet/derivatives/exact_derivatives.hpp>

int main() {
  const auto plain = [](const whet::Point<double>& at) { return std::vector<double>{at["tilt"]}; };
  const whet::Parameters parameters{{"tilt", 1.0}};
  (void)whet::detail::exact_derivatives(parameters, whet::exact(plain));
}

// A program of somebody else, which the consumer tests build by every way to get at whet.
#include <iostream>

#if __has_include(<whet/whet.hpp>)
#include <whet/whet.hpp>
#else
#include <whet/parameters/parameters.hpp>
#include <whet/support/error.hpp>
#endif

int main() {
  const whet::Parameters parameters{{"amplitude", 2.0}, {"rate", 0.5}};
  std::cout << "consumed " << parameters.size() << " parameters\n";
}

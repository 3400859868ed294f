// How much longer a first forecast takes to compile than a bare program with Eigen and one QR.

#include <algorithm>
#include <cstdlib>
#include <limits>
#include <string>

#include <sys/resource.h>

#include "row.hpp"

namespace {

/// User seconds that the programs started by this one have taken so far.
double user_seconds() {
  rusage usage{};
  getrusage(RUSAGE_CHILDREN, &usage);
  return static_cast<double>(usage.ru_utime.tv_sec) +
         1e-6 * static_cast<double>(usage.ru_utime.tv_usec);
}

/// User seconds of compiling `source`; the end where it does not compile.
double compile(const std::string& source) {
  const double before = user_seconds();
  if (std::system((WHET_COMPILE + source + "'").c_str()) != 0) std::exit(1);
  return user_seconds() - before;
}

}  // namespace

int main() {
  double ours = std::numeric_limits<double>::infinity();
  double bare = ours;
  for (int i = 0; i < 5; ++i) {  // in turn, so that a busy spell of the machine meets both
    ours = std::min(ours, compile("first_forecast.cpp"));
    bare = std::min(bare, compile("bare_eigen.cpp"));
  }
  whet::benchmark::row("compile_time: first forecast / Eigen/Dense and a QR, -O1", ours, bare, 2.0);
}

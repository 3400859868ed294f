// How many digits of the standard deviations that NIST certifies a forecast reaches.

#include <whet/whet.hpp>

#include <cstdio>
#include <string>
#include <vector>

#include <nist/digits.hpp>
#include <nist/set.hpp>
#include <nist/wide.hpp>

#include "row.hpp"

using whet::benchmark::row_at_least;

namespace {

/// The least digits over sets, and the set that has them.
struct Least {
  double digits{50.0};
  std::string set{};

  void take(double reached, const std::string& name) {
    if (reached < digits) *this = {reached, name};
  }
  void print(const std::string& what, double bar) const {
    row_at_least("nist: " + what + " (worst: " + set + ")", digits, bar, "digits");
  }
};

}  // namespace

int main() {
  Least certified, reference;
  int sharp = 0, narrow = 0, honest = 0;
  for (const nist::NamedModel& named : nist::models) {
    const nist::Set set = nist::load(std::string(named.set));
    const nist::Reached exact = nist::reached(set, nist::forecast(set, nist::Derive::exactly));
    if (set.name == "Filip") {
      row_at_least("nist: Filip as printed, exact derivatives in double", exact.certified, 6.5,
                   "digits");
    } else {
      certified.take(exact.certified, set.name);
      reference.take(exact.reference, set.name);
    }
    try {
      const nist::Reached numerical =
          nist::reached(set, nist::forecast(set, nist::Derive::numerically));
      sharp += numerical.reference >= 7.0 ? 1 : 0;
      narrow += numerical.all_measured && numerical.stated_error <= nist::accuracy ? 1 : 0;
      honest += numerical.stated_holds && exact.stated_holds ? 1 : 0;
    } catch (const whet::Error& error) {  // a set that counts for none
      std::fprintf(stderr, "nist: %s: %s\n", set.name.c_str(), error.what());
    }
  }
  certified.print("exact, certified", 9.2);
  reference.print("exact, unit_sd", 10.7);
  row_at_least("nist: in double only, sets with 7 digits", sharp, 34, "sets");
  row_at_least("nist: in double only, sets with an error <= 1e-8 stated", narrow, 34, "sets");
  row_at_least("nist: sets whose stated error holds", honest, 38, "sets");

  Least wide;
  const nist::Set filip = nist::load("Filip");
  const std::vector<nist::Wide> sigmas = nist::wide_unit_sigmas(filip);
  for (std::size_t p = 0; p < sigmas.size(); ++p) {
    wide.take(nist::digits(sigmas[p] * nist::Wide(filip.residual_standard_deviation),
                           nist::Wide(filip.standard_deviations[p])),
              filip.coefficients[p]);
  }
  wide.print("Filip, algebra in fifty digits", 14.5);
}

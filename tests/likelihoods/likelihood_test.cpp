#include <whet/likelihoods/likelihood.hpp>

#include <string>

#include <doctest/doctest.h>

#include <whet/covariances/diagonal_covariance.hpp>
#include <whet/likelihoods/gaussian_likelihood.hpp>
#include <whet/likelihoods/poisson_likelihood.hpp>

namespace {

struct Bare {
  [[nodiscard]] int response() const { return 0; }
};

}  // namespace

TEST_CASE("A likelihood has a response and a covariance of the data about it") {
  static_assert(
      whet::Likelihood<whet::GaussianLikelihood<whet::Derivatives, whet::DiagonalCovariance>>);
  static_assert(whet::Likelihood<whet::PoissonLikelihood<whet::Derivatives>>);
  static_assert(!whet::Likelihood<Bare>);
  static_assert(!whet::Likelihood<std::string>);
  static_assert(whet::detail::is_response<whet::Derivatives>);
  static_assert(!whet::detail::is_response<std::string>);
  CHECK(Bare().response() == 0);
}

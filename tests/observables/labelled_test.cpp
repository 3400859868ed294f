#include <whet/observables/labelled.hpp>

#include <string>
#include <type_traits>
#include <vector>

#include <doctest/doctest.h>

using whet::exact;
using whet::labelled;
using whet::Parameters;
using whet::Point;
using whet::detail::has_exact_derivatives;
using whet::detail::labels_of;

namespace {

const Parameters parameters{{"a", 1.0}, {"b", 2.0}};
const auto both = [](const auto& at) { return std::vector{at["a"], at["b"]}; };
const std::vector<std::string> names{"l = 2", "l = 3"};

}  // namespace

TEST_CASE("Labels change no number and are found through exact, inside or outside") {
  const auto inside = exact(labelled(both, names));
  const auto plain = exact(both);
  const auto outside = labelled(exact(both), names);
  CHECK(inside(Point<double>(parameters)) == plain(Point<double>(parameters)));
  CHECK(outside(Point<double>(parameters)) == plain(Point<double>(parameters)));
  CHECK(labels_of(inside) == names);
  CHECK(labels_of(outside) == names);
  CHECK(labels_of(plain).empty());
}

TEST_CASE("A labelled observable is exact where the one inside is") {
  static_assert(whet::Observable<decltype(labelled(both, names))>);
  static_assert(!has_exact_derivatives<decltype(labelled(both, names))>);
  static_assert(has_exact_derivatives<decltype(labelled(exact(both), names))>);
  static_assert(has_exact_derivatives<decltype(exact(labelled(both, names)))>);
  CHECK(has_exact_derivatives<decltype(exact(labelled(both, names)))>);
}

TEST_CASE("A number of labels that is not that of the elements is refused at the first call") {
  const auto wrong = labelled(both, {"l = 2"});
  CHECK_THROWS_WITH_AS(
      (void)wrong(Point<double>(parameters)),
      "labelled: number of labels: got 1, expected 2. Give one label an element of "
      "the data vector.",
      whet::ObservableError);
}

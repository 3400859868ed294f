#pragma once
/// One function at many abscissae.

#include <cstddef>
#include <functional>
#include <iterator>
#include <type_traits>
#include <vector>

namespace whet {

/// f at each x of a range, in order: the data vector of an observable in one line, in double or in
/// dual numbers.
/// @param xs  anything that a range-for loop goes through
/// @param f   called with an element of xs; returns a scalar
/// @return    std::vector of what f returns, by value
template <class Range, class F>
[[nodiscard]] auto tabulate(Range&& xs, F&& f) {
  using std::begin;
  using Value = std::decay_t<std::invoke_result_t<F&, decltype(*begin(xs))>>;
  std::vector<Value> values;
  if constexpr (requires { xs.size(); }) values.reserve(static_cast<std::size_t>(xs.size()));
  for (auto&& x : xs) values.push_back(std::invoke(f, x));
  return values;
}

}  // namespace whet

#pragma once
/// Names for the elements of a data vector.

#include <string>
#include <type_traits>
#include <utility>
#include <vector>

#include <whet/observables/exact.hpp>
#include <whet/observables/observable.hpp>
#include <whet/parameters/point.hpp>
#include <whet/support/error.hpp>

namespace whet {

/// An observable with a name for each element; made by `labelled`.
template <class F>
class Labelled {
 public:
  Labelled(F f, std::vector<std::string> labels) : f_(std::move(f)), labels_(std::move(labels)) {}

  template <class Scalar>
  requires std::is_invocable_v < const F&, const Point<Scalar>
  & > auto operator()(const Point<Scalar>& at) const {
    auto data = f_(at);
    if (static_cast<std::size_t>(data.size()) != labels_.size()) {
      detail::fail<ObservableError>({.where = "labelled",
                                     .what = "number of labels",
                                     .got = detail::text(labels_.size()),
                                     .expected = detail::text(data.size()),
                                     .advice = "Give one label an element of the data vector."});
    }
    return data;
  }

  [[nodiscard]] const std::vector<std::string>& labels() const noexcept { return labels_; }

 private:
  F f_;
  std::vector<std::string> labels_;
};

/// The observable f with names for its elements, which messages then use: `element 3 (l = 40)`.
/// Calling it throws ObservableError where there are not as many labels as elements.
template <class F>
[[nodiscard]] auto labelled(F&& f, std::vector<std::string> labels) {
  if constexpr (detail::require_observable<std::decay_t<F>>()) {
    return Labelled<std::decay_t<F>>(std::forward<F>(f), std::move(labels));
  }
}

template <class F>
inline constexpr bool detail::has_exact_derivatives<Labelled<F>> = has_exact_derivatives<F>;

}  // namespace whet

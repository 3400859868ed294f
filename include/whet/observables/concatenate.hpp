#pragma once
/// Several observables as one.

#include <string>
#include <tuple>
#include <type_traits>
#include <utility>
#include <vector>

#include <whet/observables/exact.hpp>
#include <whet/observables/observable.hpp>
#include <whet/parameters/point.hpp>

namespace whet {

/// Observables whose data vectors follow one another; made by `concatenate`.
template <class... F>
class Concatenated {
 public:
  explicit Concatenated(F... parts) : parts_(std::move(parts)...) {}

  /// @return std::vector<Scalar>, the parts' data vectors in their order
  template <class Scalar>
  requires(std::is_invocable_v<const F&, const Point<Scalar>&>&&...) std::vector<Scalar>
  operator()(const Point<Scalar>& at) const {
    std::vector<Scalar> all;
    const auto append = [&all](const auto& data) {
      all.insert(all.end(), data.data(), data.data() + data.size());
    };
    std::apply([&](const F&... part) { (append(part(at)), ...); }, parts_);
    return all;
  }

  /// The parts' labels in their order; none unless each part has some.
  [[nodiscard]] std::vector<std::string> labels() const {
    std::vector<std::string> all;
    bool complete = true;
    const auto append = [&](const std::vector<std::string>& labels) {
      complete = complete && !labels.empty();
      all.insert(all.end(), labels.begin(), labels.end());
    };
    std::apply([&](const F&... part) { (append(detail::labels_of(part)), ...); }, parts_);
    return complete ? all : std::vector<std::string>{};
  }

 private:
  std::tuple<F...> parts_;
};

/// One observable whose data vector is that of the first part, then that of the second, ...: probes
/// that share a covariance. Parts may return std::vector or Eigen columns. It has exact derivatives
/// if all parts do; parts that are generic may be marked together, `exact(concatenate(f, g))`.
template <class... F>
[[nodiscard]] auto concatenate(F&&... parts) {
  static_assert(sizeof...(F) > 0, "whet: concatenate needs an observable");
  if constexpr ((detail::require_observable<std::decay_t<F>>() && ...)) {
    return Concatenated<std::decay_t<F>...>(std::forward<F>(parts)...);
  }
}

template <class... F>
inline constexpr bool detail::has_exact_derivatives<Concatenated<F...>> =
    (has_exact_derivatives<F> && ...);

}  // namespace whet

#pragma once
/// A point of the parameter space: what an observable is called with.

#include <cassert>
#include <memory>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/parameters/parameters.hpp>

namespace whet {

/// Values of the parameters, looked up by name: `at["h"]`, and `at("bias", 3)` for `bias[3]`
/// without composing a name. A look-up is one hash of the name. Scalar is double, or a dual number
/// where exact derivatives are asked for.
template <class Scalar>
class Point {
 public:
  /// The fiducial point.
  explicit Point(const Parameters& parameters) : table_(parameters.table()) {
    values_.reserve(static_cast<std::size_t>(parameters.size()));
    for (const Parameter& p : parameters) values_.emplace_back(p.fiducial);
  }

  /// The point with these values, in the order of the parameters.
  Point(const Parameters& parameters, std::vector<Scalar> values)
      : table_(parameters.table()), values_(std::move(values)) {
    if (static_cast<Eigen::Index>(values_.size()) != parameters.size()) {
      detail::fail<ParameterError>({.where = "Point",
                                    .what = "number of values",
                                    .got = detail::text(values_.size()),
                                    .expected = detail::text(parameters.size())});
    }
  }

  /// The value of a parameter, in its unit.
  /// @throws ParameterError naming it and those there are
  [[nodiscard]] const Scalar& operator[](std::string_view name) const {
    return values_[static_cast<std::size_t>(table_->index("Point", name))];
  }

  /// The value of member i of a numbered family, `family[i]`.
  /// @throws ParameterError if there is no such member
  [[nodiscard]] const Scalar& operator()(std::string_view family, Eigen::Index i) const {
    const std::vector<Eigen::Index>& members = table_->family(family);
    if (i < 0 || i >= static_cast<Eigen::Index>(members.size()) ||
        members[static_cast<std::size_t>(i)] < 0) {
      table_->unknown("Point", std::string(family) + "[" + detail::text(i) + "]");
    }
    return values_[static_cast<std::size_t>(members[static_cast<std::size_t>(i)])];
  }

  /// All values, in the order of the parameters.
  [[nodiscard]] const std::vector<Scalar>& values() const noexcept { return values_; }
  [[nodiscard]] const std::vector<std::string>& names() const noexcept { return table_->names(); }

 private:
  std::shared_ptr<const detail::NameTable> table_;
  std::vector<Scalar> values_;
};

}  // namespace whet

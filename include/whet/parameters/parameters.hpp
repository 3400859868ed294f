#pragma once
/// The parameters of a model: ordered, with unique names.

#include <algorithm>
#include <charconv>
#include <functional>
#include <initializer_list>
#include <memory>
#include <string>
#include <string_view>
#include <system_error>
#include <unordered_map>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/parameters/parameter.hpp>
#include <whet/support/error.hpp>

namespace whet {

namespace detail {

/// Where each name and each member of a numbered family stands; built once, shared by all points.
class NameTable {
 public:
  explicit NameTable(const std::vector<Parameter>& parameters) {
    for (const Parameter& p : parameters) {
      const auto index = static_cast<Eigen::Index>(names_.size());
      if (!places_.emplace(p.name, index).second) {
        fail<ParameterError>({.where = "Parameters",
                              .what = "parameter " + in_quotes(p.name) + " is given twice",
                              .advice = "Names must differ."});
      }
      names_.push_back(p.name);
      // name[k] is member k of its family, wherever it stands and whoever else is there.
      const auto bracket = p.name.rfind('[');
      if (bracket == std::string::npos || bracket == 0 || p.name.back() != ']') continue;
      std::size_t k = 0;
      const char* const end = p.name.data() + p.name.size() - 1;
      const auto read = std::from_chars(p.name.data() + bracket + 1, end, k);
      if (read.ec != std::errc() || read.ptr != end || k >= most_members) continue;
      std::vector<Eigen::Index>& family = families_[p.name.substr(0, bracket)];
      if (family.size() <= k) family.resize(k + 1, -1);
      family[k] = index;
    }
  }

  [[nodiscard]] const std::vector<std::string>& names() const noexcept { return names_; }

  /// Position of a name, or -1.
  [[nodiscard]] Eigen::Index find(std::string_view name) const {
    const auto place = places_.find(name);
    return place == places_.end() ? -1 : place->second;
  }

  /// Positions of name[0], name[1], ..., -1 for one that is not there; empty where there is no such
  /// family.
  [[nodiscard]] const std::vector<Eigen::Index>& family(std::string_view name) const {
    static const std::vector<Eigen::Index> none;
    const auto place = families_.find(name);
    return place == families_.end() ? none : place->second;
  }

  /// @throws ParameterError that names it and lists those there are
  [[noreturn]] void unknown(std::string_view where, std::string_view name) const {
    fail<ParameterError>(
        {.where = std::string(where),
         .what = "parameter " + in_quotes(name) + ": not among " +
                 (names_.empty() ? std::string("the names: there are none") : listed(names_)),
         .advice = "Correct the spelling or list parameters()."});
  }

  [[nodiscard]] Eigen::Index index(std::string_view where, std::string_view name) const {
    const Eigen::Index place = find(name);
    if (place < 0) unknown(where, name);
    return place;
  }

 private:
  static constexpr std::size_t most_members = 1'000'000;
  struct Hash {
    using is_transparent = void;  // look up by string_view, without making a string
    std::size_t operator()(std::string_view name) const noexcept {
      return std::hash<std::string_view>{}(name);
    }
  };
  std::vector<std::string> names_;
  std::unordered_map<std::string, Eigen::Index, Hash, std::equal_to<>> places_;
  std::unordered_map<std::string, std::vector<Eigen::Index>, Hash, std::equal_to<>> families_;
};

}  // namespace detail

/// The parameters of a model, in order, with unique names. An immutable value, cheap to copy.
class Parameters {
 public:
  /// No parameters: something to begin `with`.
  Parameters() : Parameters(std::vector<Parameter>{}) {}

  /// @throws ParameterError naming the parameter: an empty or repeated name, a fiducial that is not
  ///   finite or outside its bounds, bounds out of order, a negative scale
  Parameters(std::initializer_list<Parameter> list) : Parameters(std::vector<Parameter>(list)) {}
  explicit Parameters(std::vector<Parameter> list) {
    for (const Parameter& p : list) detail::check(p);
    table_ = std::make_shared<const detail::NameTable>(list);
    list_ = std::make_shared<const std::vector<Parameter>>(std::move(list));
  }

  /// These and one more; these and several more, e.g. `with(numbered("bias", 5, {.fiducial = 1}))`.
  [[nodiscard]] Parameters with(const Parameter& another) const {
    return with(std::vector<Parameter>{another});
  }
  [[nodiscard]] Parameters with(const std::vector<Parameter>& more) const {
    std::vector<Parameter> all = *list_;
    all.insert(all.end(), more.begin(), more.end());
    return Parameters(std::move(all));
  }

  [[nodiscard]] Eigen::Index size() const noexcept {
    return static_cast<Eigen::Index>(list_->size());
  }
  [[nodiscard]] bool empty() const noexcept { return list_->empty(); }
  [[nodiscard]] auto begin() const noexcept { return list_->begin(); }
  [[nodiscard]] auto end() const noexcept { return list_->end(); }

  /// The parameter of that name, or at that position (0 <= position < size(), not checked).
  /// @throws ParameterError naming it and those there are
  [[nodiscard]] const Parameter& operator[](std::string_view name) const {
    return (*this)[index(name)];
  }
  [[nodiscard]] const Parameter& operator[](Eigen::Index position) const {
    return (*list_)[static_cast<std::size_t>(position)];
  }

  /// Position of a name. @throws ParameterError naming it and those there are
  [[nodiscard]] Eigen::Index index(std::string_view name) const {
    return table_->index("Parameters", name);
  }
  [[nodiscard]] bool contains(std::string_view name) const { return table_->find(name) >= 0; }

  [[nodiscard]] const std::vector<std::string>& names() const noexcept { return table_->names(); }

  /// The names bias[0], bias[1], ... of a numbered family, those that are there, by number.
  /// @throws ParameterError if there is none
  [[nodiscard]] std::vector<std::string> group(std::string_view family) const {
    std::vector<std::string> members;
    for (const Eigen::Index i : table_->family(family)) {
      if (i >= 0) members.push_back((*this)[i].name);
    }
    if (members.empty()) table_->unknown("Parameters::group", std::string(family) + "[0]");
    return members;
  }

  /// The fiducial values, in order, each in the unit of its parameter.
  [[nodiscard]] Eigen::VectorXd fiducials() const {
    Eigen::VectorXd values(size());
    for (Eigen::Index i = 0; i < size(); ++i) values(i) = (*this)[i].fiducial;
    return values;
  }

  bool operator==(const Parameters& other) const { return *list_ == *other.list_; }

  /// The shared table of names, for `Point` and for messages.
  [[nodiscard]] const std::shared_ptr<const detail::NameTable>& table() const noexcept {
    return table_;
  }

 private:
  std::shared_ptr<const std::vector<Parameter>> list_;
  std::shared_ptr<const detail::NameTable> table_;
};

}  // namespace whet

#pragma once
/// Reading a JSON document by its fields, each with its place, so that a complaint can name it.

#include <cmath>
#include <cstdint>
#include <limits>
#include <set>
#include <string>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/report/json_document.hpp>
#include <whet/support/error.hpp>

namespace whet::detail {

/// One value of a document and its place there. Refers to the document and the name of the file.
class Field {
 public:
  /// The document itself. @param file  for messages
  Field(const Json& document, const std::string& file) : Field(document, file, {}) {}

  /// @throws FileError "<file>: <place>: got ..., expected ..."; so does everything below
  [[noreturn]] void refuse(const std::string& expected, const std::string& advice = {}) const {
    refuse_as(in_words(value_), expected, advice);
  }
  [[noreturn]] void refuse_as(const std::string& got, const std::string& expected,
                              const std::string& advice = {}) const {
    fail<FileError>({.where = file_,
                     .what = place_.empty() ? "the document" : place_,
                     .got = got,
                     .expected = expected,
                     .advice = advice});
  }

  /// A field of an object.
  [[nodiscard]] Field operator[](const std::string& key) const {
    if (!value_.is_object()) refuse("an object");
    const auto found = value_.find(key);
    const std::string place = place_.empty() ? key : place_ + "." + key;
    if (found == value_.end()) Field(value_, file_, place).refuse_as("nothing", "such a field");
    return {*found, file_, place};
  }

  /// The elements of an array.
  [[nodiscard]] std::vector<Field> elements() const {
    if (!value_.is_array()) refuse("an array");
    std::vector<Field> all;
    for (std::size_t i = 0; i < value_.size(); ++i) all.push_back(element(i));
    return all;
  }
  /// The same of an array whose size is known.
  [[nodiscard]] std::vector<Field> elements(Eigen::Index count) const {
    check_size(count);
    return elements();
  }

  [[nodiscard]] std::string text() const {
    if (!value_.is_string()) refuse("a string");
    return value_.get<std::string>();
  }
  [[nodiscard]] bool flag() const {
    if (!value_.is_boolean()) refuse("true or false");
    return value_.get<bool>();
  }
  [[nodiscard]] std::int64_t whole_number(std::int64_t lowest, std::int64_t highest) const {
    if (value_.is_number_integer()) {
      const auto number = value_.get<std::int64_t>();
      const bool wrapped = value_.is_number_unsigned() && number < 0;
      if (!wrapped && number >= lowest && number <= highest) return number;
    }
    refuse("a whole number from " + detail::text(lowest) + " to " + detail::text(highest));
  }
  [[nodiscard]] int count() const {
    return static_cast<int>(whole_number(0, std::numeric_limits<int>::max()));
  }
  /// A number, or an infinity by name.
  [[nodiscard]] double number() const {
    if (value_.is_number()) {
      const auto number = value_.get<double>();
      if (!std::isnan(number)) return number;
    }
    if (value_ == "inf") return std::numeric_limits<double>::infinity();
    if (value_ == "-inf") return -std::numeric_limits<double>::infinity();
    refuse(R"(a number, "inf" or "-inf")");
  }

  [[nodiscard]] std::vector<std::string> texts() const {
    std::vector<std::string> all;
    for (const Field& each : elements()) all.push_back(each.text());
    return all;
  }
  /// Strings of which none stands twice.
  [[nodiscard]] std::vector<std::string> names() const {
    std::set<std::string> known;
    for (const Field& each : elements()) {
      if (!known.insert(each.text()).second) each.refuse("a name that is not there twice");
    }
    return texts();
  }
  [[nodiscard]] Eigen::VectorXd vector(Eigen::Index size) const {
    check_size(size);
    Eigen::VectorXd numbers(size);
    for (Eigen::Index i = 0; i < size; ++i) {
      const auto place = static_cast<std::size_t>(i);
      const Json& each = value_[place];
      const bool plain = each.is_number_float() && !std::isnan(each.get<double>());
      numbers(i) = plain ? each.get<double>() : element(place).number();  // composes a place: rare
    }
    return numbers;
  }
  [[nodiscard]] Eigen::VectorXd vector() const {
    if (!value_.is_array()) refuse("an array of numbers");
    return vector(ssize());
  }
  /// Numbers >= 0.
  [[nodiscard]] Eigen::VectorXd sizes(Eigen::Index size) const {
    Eigen::VectorXd numbers = vector(size);
    for (Eigen::Index i = 0; i < size; ++i) {
      if (numbers(i) < 0.0) element(static_cast<std::size_t>(i)).refuse("a size >= 0");
    }
    return numbers;
  }
  [[nodiscard]] Eigen::VectorXd sizes() const { return sizes(vector().size()); }
  /// An array of rows.
  [[nodiscard]] Eigen::MatrixXd matrix(Eigen::Index rows, Eigen::Index columns) const {
    check_size(rows);
    Eigen::MatrixXd numbers(rows, columns);
    for (Eigen::Index i = 0; i < rows; ++i) {
      numbers.row(i) = element(static_cast<std::size_t>(i)).vector(columns).transpose();
    }
    return numbers;
  }
  template <class Enum, std::size_t count>
  [[nodiscard]] Enum one_of(const Spellings<Enum, count>& spellings) const {
    std::vector<std::string> words;
    for (const auto& [value, word] : spellings) {
      if (value_ == word) return value;
      words.emplace_back(word);
    }
    refuse("one of " + listed(words));
  }

  /// What `make` returns; a complaint of whet's own about the content becomes one about the file.
  template <class Make>
  [[nodiscard]] auto made(const Make& make) const {
    try {
      return make();
    } catch (const FileError&) {
      throw;
    } catch (const Error& error) {
      const std::string place = place_.empty() ? "" : place_ + ": ";
      fail<FileError>({.where = file_, .what = place + error.what()});
    }
  }

 private:
  Field(const Json& value, const std::string& file, std::string place)
      : value_(value), file_(file), place_(std::move(place)) {}

  [[nodiscard]] Eigen::Index ssize() const { return static_cast<Eigen::Index>(value_.size()); }
  [[nodiscard]] Field element(std::size_t i) const {
    return {value_[i], file_, place_ + "[" + detail::text(i) + "]"};
  }
  void check_size(Eigen::Index size) const {
    if (!value_.is_array() || ssize() != size) refuse("an array of " + detail::text(size));
  }
  [[nodiscard]] static std::string in_words(const Json& value) {
    if (value.is_array()) return "an array of " + detail::text(value.size());
    if (value.is_object()) return "an object";
    const std::string words = value.dump(-1, ' ', false, Json::error_handler_t::replace);
    return words.size() > 80 ? words.substr(0, 80) + "..." : words;
  }

  const Json& value_;
  const std::string& file_;
  std::string place_;
};

}  // namespace whet::detail

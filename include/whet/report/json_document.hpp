#pragma once
/// JSON documents as text: one line a field, a row of a matrix and a parameter; every number with
/// the digits that give it back.

#include <array>
#include <cmath>
#include <set>
#include <string>
#include <utility>
#include <vector>

#include <Eigen/Core>
#include <nlohmann/json.hpp>

#include <whet/support/error.hpp>

namespace whet::detail {

/// Fields keep their order.
using Json = nlohmann::ordered_json;

/// How the enumerators of a type are written.
template <class Enum, std::size_t count>
using Spellings = std::array<std::pair<Enum, const char*>, count>;

template <class Enum, std::size_t count>
[[nodiscard]] Json in_json(Enum value, const Spellings<Enum, count>& spellings) {
  for (const auto& [known, word] : spellings) {
    if (known == value) return word;
  }
  return nullptr;
}

[[nodiscard]] inline Json in_json(double value) {
  if (!std::isinf(value)) return value;
  return value > 0.0 ? "inf" : "-inf";
}

[[nodiscard]] inline Json in_json(const Eigen::VectorXd& vector) {
  Json::array_t numbers;
  numbers.reserve(static_cast<std::size_t>(vector.size()));
  for (const double each : vector) numbers.push_back(in_json(each));
  return numbers;
}

[[nodiscard]] inline Json in_json(const Eigen::MatrixXd& matrix) {
  Json::array_t rows;
  rows.reserve(static_cast<std::size_t>(matrix.rows()));
  for (Eigen::Index i = 0; i < matrix.rows(); ++i) {
    rows.push_back(in_json(Eigen::VectorXd(matrix.row(i).transpose())));
  }
  return rows;
}

/// The words of nlohmann/json without its tag, cut where they quote a damaged file at length.
[[nodiscard]] inline std::string words_of(const Json::exception& error) {
  const std::string words = error.what();
  return words.substr(words.find("] ") + 2, 240);
}

/// @throws FileError if a string is not UTF-8
[[nodiscard]] inline std::string lines(const Json& document, const std::string& file) {
  std::string text;
  for (const auto& [key, value] : document.items()) {
    text += (text.empty() ? "{\n" : ",\n") + Json(key).dump() + ": ";
    try {
      if (value.is_array() && !value.empty() && value.front().is_structured()) {
        const char* before = "[\n";
        for (const Json& each : value) {
          text += before + each.dump();
          before = ",\n";
        }
        text += "\n]";
      } else {
        text += value.dump();
      }
    } catch (const Json::exception& error) {
      fail<FileError>(
          {.where = file, .what = key, .got = words_of(error), .expected = "text in UTF-8"});
    }
  }
  return text + "\n}\n";
}

/// @throws FileError if the text is no JSON, or an object has a field twice
[[nodiscard]] inline Json parsed(const std::string& text, const std::string& file) {
  std::vector<std::set<std::string>> open;  // the keys so far of the objects around
  const auto refuse_twice = [&](int, Json::parse_event_t event, const Json& value) {
    if (event == Json::parse_event_t::object_start) open.emplace_back();
    if (event == Json::parse_event_t::object_end) open.pop_back();
    if (event == Json::parse_event_t::key && !open.back().insert(value.get<std::string>()).second) {
      fail<FileError>({.where = file, .what = "field " + value.dump() + " stands twice"});
    }
    return true;
  };
  try {
    return Json::parse(text, refuse_twice);
  } catch (const Json::exception& error) {
    fail<FileError>({.where = file,
                     .what = "reading",
                     .got = words_of(error),
                     .expected = "a whole JSON document"});
  }
}

}  // namespace whet::detail

#pragma once
/// Numbers and lists as text, for messages and notes.

#include <charconv>
#include <concepts>
#include <span>
#include <string>
#include <string_view>

namespace whet::detail {

/// A floating-point number with the fewest digits that give it back, whatever the locale.
[[nodiscard]] inline std::string text(double value) {
  char buffer[32];
  const auto end = std::to_chars(buffer, buffer + sizeof buffer, value).ptr;
  return std::string(buffer, end);
}

/// The same, rounded to a number of significant digits.
[[nodiscard]] inline std::string text(double value, int digits) {
  char buffer[64];
  const auto end =
      std::to_chars(buffer, buffer + sizeof buffer, value, std::chars_format::general, digits).ptr;
  return std::string(buffer, end);
}

[[nodiscard]] inline std::string text(std::integral auto value) { return std::to_string(value); }

[[nodiscard]] inline std::string in_quotes(std::string_view name) {
  return '"' + std::string(name) + '"';
}

/// "h, n, omega"; a long list is cut after twenty names and says how many there are.
[[nodiscard]] inline std::string listed(std::span<const std::string> names) {
  constexpr std::size_t most = 20;
  std::string all;
  for (std::size_t i = 0; i < names.size() && i < most; ++i) {
    if (i > 0) all += ", ";
    all += names[i];
  }
  if (names.size() > most) all += ", ... (" + text(names.size()) + " in all)";
  return all;
}

}  // namespace whet::detail

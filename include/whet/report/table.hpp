#pragma once
/// A forecast as a table that a person reads.

#include <algorithm>
#include <charconv>
#include <cmath>
#include <ostream>
#include <string>
#include <string_view>
#include <vector>

#include <Eigen/Core>

#include <whet/forecasts/forecast.hpp>
#include <whet/support/text.hpp>

namespace whet {

namespace detail {

/// Characters of a UTF-8 string, so that columns line up.
[[nodiscard]] inline std::size_t width(std::string_view text) {
  return static_cast<std::size_t>(std::count_if(text.begin(), text.end(), [](char c) {
    return (static_cast<unsigned char>(c) & 0xC0U) != 0x80U;
  }));
}

/// How many significant digits to show of a number with a relative error, 1 to `most`: up to the
/// first that the error blurs.
[[nodiscard]] inline int digits_shown(double relative_error, int most) {
  if (!(relative_error < 1.0)) return 1;
  if (relative_error == 0.0) return most;
  return std::min(static_cast<int>(std::floor(-std::log10(relative_error))) + 1, most);
}

/// A finite number rounded to some significant digits, zeros at the end included; in scientific
/// notation only where it would be long.
[[nodiscard]] inline std::string rounded(double value, int digits) {
  if (!std::isfinite(value)) return "-";
  char buffer[64];
  const auto format = [&](std::chars_format how, int places) {
    return std::string(buffer,
                       std::to_chars(buffer, buffer + sizeof buffer, value, how, places).ptr);
  };
  std::string scientific = format(std::chars_format::scientific, digits - 1);
  const auto power = scientific.find('e');
  const int exponent = std::stoi(scientific.substr(power + 1));
  if (exponent < -4 || exponent > 5) return scientific;
  if (exponent < digits) return format(std::chars_format::fixed, digits - 1 - exponent);
  std::string whole = scientific.substr(0, power);  // 123456 to two digits is 120000
  std::erase(whole, '.');
  return whole + std::string(static_cast<std::size_t>(exponent - digits + 1), '0');
}

/// A standard deviation with the digits that its relative error leaves to be shown.
[[nodiscard]] inline std::string sigma_in_words(double sigma, double relative_error) {
  if (!std::isfinite(sigma)) return "not measured";
  return rounded(sigma, digits_shown(relative_error, 4));
}

[[nodiscard]] inline std::string error_in_words(double relative_error) {
  if (!std::isfinite(relative_error)) return "no bound";
  return relative_error < 1e-4 ? "< 0.01 %" : rounded(100.0 * relative_error, 2) + " %";
}

/// A sentence after a word that says what it is, in lines of 80 characters.
inline void print_wrapped(std::ostream& out, const std::string& heading,
                          const std::string& sentence) {
  constexpr std::size_t most = 80;
  std::string line = heading;
  for (std::size_t begin = 0; begin <= sentence.size();) {
    const std::size_t end = std::min(sentence.find(' ', begin), sentence.size());
    const std::string word = sentence.substr(begin, end - begin);
    if (width(line) + 1 + width(word) > most) {
      out << line << '\n';
      line = std::string(heading.size(), ' ');
    }
    line += ' ' + word;
    begin = end + 1;
  }
  out << line << '\n';
}

}  // namespace detail

/// A line a parameter: name with unit, fiducial value, sigma, sigma in per cent of the fiducial
/// value, sigma if all others were known, and the bound on the numerical error of sigma in per cent
/// of it. Digits that the error blurs, but for the first, are not shown. The notes follow.
inline std::ostream& operator<<(std::ostream& out, const Forecast& forecast) {
  std::vector<std::vector<std::string>> rows{
      {"parameter", "fiducial", "sigma", "% of fiducial", "if others known", "numerical error"}};
  const RootInformation& root = forecast.information().parts().root;
  const NumericalErrors errors = root.errors();
  const Eigen::Index count = forecast.parameters().size();
  for (Eigen::Index i = 0; i < count; ++i) {
    const Parameter& p = forecast.parameters()[i];
    const double sigma = forecast.sigma(p.name), alone = forecast.conditional_sigma(p.name);
    const double error = forecast.numerical_error(p.name) / sigma;
    const double error_alone = errors.bound(Eigen::VectorXd::Unit(count, i)) * alone;
    const bool measured = std::isfinite(sigma);
    const bool relative = measured && p.fiducial != 0.0;
    rows.push_back({p.unit.empty() ? p.name : p.name + " [" + p.unit + "]",
                    detail::text(p.fiducial, 6), detail::sigma_in_words(sigma, error),
                    relative ? detail::rounded(100.0 * sigma / std::abs(p.fiducial),
                                               detail::digits_shown(error, 3))
                             : "-",
                    detail::sigma_in_words(alone, error_alone),
                    measured ? detail::error_in_words(error) : "-"});
  }
  std::vector<std::size_t> widths(rows.front().size(), 0);
  for (const auto& row : rows) {
    for (std::size_t c = 0; c < row.size(); ++c) {
      widths[c] = std::max(widths[c], detail::width(row[c]));
    }
  }
  for (const auto& row : rows) {
    for (std::size_t c = 0; c < row.size(); ++c) {
      const std::string padding(widths[c] - detail::width(row[c]), ' ');
      out << (c == 0 ? row[c] + padding : "  " + padding + row[c]);
    }
    out << '\n';
  }
  for (const std::string& note : forecast.notes()) detail::print_wrapped(out, "note:", note);
  return out;
}

}  // namespace whet

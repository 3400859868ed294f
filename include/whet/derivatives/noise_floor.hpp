#pragma once
/// The noise of a code, element by element, from the highest divided differences of its values.

#include <algorithm>
#include <array>
#include <cmath>
#include <cstddef>
#include <limits>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/derivatives/readings.hpp>
#include <whet/derivatives/rounded_output.hpp>
#include <whet/derivatives/window.hpp>

namespace whet::detail {

using Mask = Eigen::Array<bool, Eigen::Dynamic, 1>;

/// What is known of the noise of each element.
struct NoiseFloor {
  Eigen::VectorXd level{};  ///< eta: a standard deviation, made safely large
  Mask confirmed{};         ///< noise was seen, where else `level` may be all truncation
  Mask rounded{};           ///< the output has few digits
  Eigen::VectorXd even{};   ///< two draws of the noise from the longest window, in units of its
  Eigen::VectorXd odd{};    ///< level, which share no noise
};

/// Bounds on the noise that an audit close to the fiducial point found; 0 and infinity: none.
struct NoiseBounds {
  Eigen::VectorXd least{};
  Eigen::VectorXd most{};
};

/// The median of some numbers, the lower of two; 0 for none.
[[nodiscard]] inline double lower_median(std::vector<double> numbers) {
  if (numbers.empty()) return 0.0;
  const auto middle = numbers.begin() + static_cast<std::ptrdiff_t>((numbers.size() - 1) / 2);
  std::nth_element(numbers.begin(), middle, numbers.end());
  return *middle;
}

/// The noise of one element from draws of several windows: draws that agree are noise, a draw alone
/// may be truncation. `members` gets the number that agree.
[[nodiscard]] inline double level_of_draws(const std::vector<double>& draws, int& members) {
  const double smallest = *std::min_element(draws.begin(), draws.end());
  double logarithms = 0.0;
  members = 0;
  for (const double draw : draws) {
    if (draw > 8.0 * smallest) continue;
    ++members;
    logarithms += std::log(std::max(draw, std::numeric_limits<double>::min()));
  }
  constexpr std::array<double, 4> factors{3.0, 2.2, 1.8, 1.5};  // for the luck of few draws
  return smallest > 0.0 ? factors[static_cast<std::size_t>(std::min(members, 4) - 1)] *
                              std::exp(logarithms / members)
                        : 0.0;
}

/// Two draws of the noise of an element from each window, in the unit of its values.
struct NoiseDraw {
  double even{}, odd{};
};

/// @param change, growth  K each, of one element
/// @param c               the contrast
[[nodiscard]] inline NoiseDraw noise_draw(const Windows& windows, Eigen::Index c,
                                          const Eigen::VectorXd& change,
                                          const Eigen::VectorXd& growth) {
  double even = 0.0, odd = 0.0, even_norm2 = 0.0, odd_norm2 = 0.0;
  for (Eigen::Index k = 0; k < change.size(); ++k) {
    const double e = windows.even_contrasts()(k, c), o = windows.odd_contrasts()(k, c);
    const double growth2 = growth(k) * growth(k);
    even += change(k) * e;
    odd += change(k) * o;
    even_norm2 += growth2 * (e * e);
    odd_norm2 += growth2 * (o * o);
  }
  even_norm2 += windows.even_origin()(c) * windows.even_origin()(c);
  return {even / std::sqrt(even_norm2), odd / std::sqrt(odd_norm2)};
}

/// The noise that the draws of all windows show.
[[nodiscard]] inline NoiseFloor noise_drawn(const Readings& readings, const Windows& windows) {
  const Eigen::Index n = readings.elements();
  NoiseFloor noise{.level = Eigen::VectorXd::Zero(n),
                   .confirmed = Mask::Constant(n, false),
                   .rounded = Mask::Constant(n, false),
                   .even = Eigen::VectorXd::Zero(n),
                   .odd = Eigen::VectorXd::Zero(n)};
  const std::vector<Eigen::Index>& which = windows.contrast_windows();
  if (which.empty()) return noise;
  std::size_t longest = 0;
  std::vector<bool> paired(which.size());  // a pair at least
  for (std::size_t c = 0; c < which.size(); ++c) {
    const Window& window = windows[which[c]];
    // Of the longest the nearest: the least truncation.
    if (window.length() > windows[which[longest]].length()) longest = c;
    for (std::size_t r = window.first; r <= window.last; ++r) {
      paired[c] = paired[c] || windows.rungs_of(0)[r].paired();
    }
  }
  // Many elements are many draws: less has to be allowed for the luck of one.
  const double crowd = n >= 16 ? 0.45 : 1.0;
  std::vector<double> sizes(which.size());
  for (Eigen::Index i = 0; i < n; ++i) {
    const Eigen::VectorXd change = readings.changes_of(i), growth = readings.growths_of(i);
    for (std::size_t c = 0; c < which.size(); ++c) {
      const NoiseDraw draw = noise_draw(windows, static_cast<Eigen::Index>(c), change, growth);
      sizes[c] = paired[c] ? std::sqrt((draw.even * draw.even + draw.odd * draw.odd) / 2.0)
                           : std::max(std::abs(draw.even), std::abs(draw.odd));
      if (c == longest) noise.even(i) = draw.even, noise.odd(i) = draw.odd;
    }
    int members = 0;
    noise.level(i) = crowd * level_of_draws(sizes, members);
    noise.confirmed(i) = members >= 2;
  }
  return noise;
}

/// The noise of all elements.
[[nodiscard]] inline NoiseFloor noise_floor(const Readings& readings, const Windows& windows,
                                            const NoiseBounds& bounds) {
  const Eigen::Index n = readings.elements();
  NoiseFloor noise = noise_drawn(readings, windows);
  for (Eigen::Index i = 0; i < n; ++i) {
    const double quantum = rounding_quantum(readings.origin(i), readings.values_of(i));
    if (quantum > 0.0) {
      noise.level(i) = std::clamp(noise.level(i), 0.35 * quantum, 0.6 * quantum);
      noise.rounded(i) = noise.confirmed(i) = true;
    } else if (bounds.most.size() > 0 && std::isfinite(bounds.most(i))) {
      noise.level(i) = std::clamp(noise.level(i), bounds.least(i), bounds.most(i));
      noise.confirmed(i) = true;
    }
  }
  if (n >= 8) {  // elements of one code are alike in their relative noise
    std::vector<std::pair<double, double>> relative;  // and the say: of values near 0 none
    double say = 0.0;
    for (Eigen::Index i = 0; i < n; ++i) {
      const double value = std::abs(readings.origin(i));
      if (value > 0.0) relative.emplace_back(noise.level(i) / value, value), say += value;
    }
    std::sort(relative.begin(), relative.end());
    double least = 0.0, heard = 0.0;
    for (const auto& [level, value] : relative) {
      least = 0.7 * level;
      heard += value;
      if (heard >= 0.5 * say) break;
    }
    for (Eigen::Index i = 0; i < n; ++i) {
      noise.level(i) = std::max(noise.level(i), least * std::abs(readings.origin(i)));
    }
  }
  for (Eigen::Index i = 0; i < n; ++i) {
    if (noise.level(i) > 0.0) noise.even(i) /= noise.level(i), noise.odd(i) /= noise.level(i);
  }
  return noise;
}

/// Is the noise shown to be independent from element to element? Two draws an element that share no
/// noise are compared with what n independent draws allow: no part common to all elements, to their
/// signs or to those of their slopes (jitter of a call, relative jitter, jitter of the parameter),
/// no likeness of neighbours, and none of the two draws.
/// @param slopes  n, derivatives, for their signs
[[nodiscard]] inline bool shown_independent(const NoiseFloor& noise, const Eigen::VectorXd& origin,
                                            const Eigen::VectorXd& slopes) {
  constexpr double allowed = 3.5;  // standard deviations
  std::vector<double> even, odd, sign, slope;
  for (Eigen::Index i = 0; i < origin.size(); ++i) {
    if (!noise.confirmed(i) || (noise.even(i) == 0.0 && noise.odd(i) == 0.0)) continue;
    even.push_back(noise.even(i));
    odd.push_back(noise.odd(i));
    sign.push_back(std::copysign(1.0, origin(i)));
    slope.push_back(std::copysign(1.0, slopes(i)));
  }
  const std::size_t n = even.size();
  if (n < 16) return false;
  std::vector<double> ones(n, 1.0);
  const auto likeness = [](const std::vector<double>& a, const std::vector<double>& b,
                           std::size_t lag) {  // in standard deviations of independent draws
    double ab = 0.0, aa = 0.0, bb = 0.0;
    for (std::size_t i = 0; i < a.size(); ++i) aa += a[i] * a[i], bb += b[i] * b[i];
    for (std::size_t i = 0; i + lag < a.size(); ++i) ab += a[i] * b[i + lag];
    return aa > 0.0 && bb > 0.0
               ? std::abs(ab) / std::sqrt(aa * bb) * std::sqrt(static_cast<double>(a.size()))
               : 0.0;
  };
  for (const auto* draw : {&even, &odd}) {
    for (const std::vector<double>* pattern : {&ones, &sign, &slope}) {
      if (likeness(*draw, *pattern, 0) > allowed) return false;
    }
    if (likeness(*draw, *draw, 1) > allowed) return false;
  }
  return likeness(even, odd, 0) <= allowed;
}

}  // namespace whet::detail

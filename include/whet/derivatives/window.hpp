#pragma once
/// Windows of consecutive steps, and the weights that make derivatives and noise draws of them.

#include <algorithm>
#include <array>
#include <cmath>
#include <numeric>
#include <span>
#include <vector>

#include <Eigen/Core>

namespace whet::detail {

/// Weights w of the derivative at 0 of the polynomial through (0, 0) and the nodes (t_k, d_k):
/// sum_k w_k d_k. On symmetric pairs this is Richardson extrapolation in h^2, on one side in h; any
/// spacing is allowed. Source: Lagrange's formula; the weights are those of Fornberg (1988).
/// @param t  distinct and not 0
[[nodiscard]] inline Eigen::VectorXd derivative_weights(std::span<const double> t) {
  Eigen::VectorXd w(static_cast<Eigen::Index>(t.size()));
  for (std::size_t k = 0; k < t.size(); ++k) {
    double weight = 1.0 / t[k];
    for (std::size_t l = 0; l < t.size(); ++l) {
      if (l != k) weight *= -t[l] / (t[k] - t[l]);
    }
    w(static_cast<Eigen::Index>(k)) = weight;
  }
  return w;
}

/// Weights of the highest divided difference over the nodes, the largest scaled to 1.
/// @param t  distinct, at least two
[[nodiscard]] inline Eigen::VectorXd difference_weights(std::span<const double> t) {
  double top = 0.0;
  for (const double step : t) top = std::max(top, std::abs(step));
  Eigen::VectorXd c = Eigen::VectorXd::Ones(static_cast<Eigen::Index>(t.size()));
  for (std::size_t k = 0; k < t.size(); ++k) {
    for (std::size_t l = 0; l < t.size(); ++l) {
      if (l != k) c(static_cast<Eigen::Index>(k)) /= (t[k] - t[l]) / top;
    }
  }
  double largest = 0.0;
  for (Eigen::Index k = 0; k < c.size(); ++k) largest = std::max(largest, std::abs(c(k)));
  for (Eigen::Index k = 0; k < c.size(); ++k) c(k) /= largest;
  return c;
}

/// One step of the ladder: the positions of its nodes, -1 where a side is missing.
struct Rung {
  double step{};
  Eigen::Index plus{-1};
  Eigen::Index minus{-1};

  [[nodiscard]] bool paired() const noexcept { return plus >= 0 && minus >= 0; }
  /// The power of the step by which an extrapolation gains from this rung.
  [[nodiscard]] double gain() const noexcept { return paired() ? step * step : step; }
};

/// The nodes as rungs, in order of their step.
/// @param t  distinct and not 0, in any order
[[nodiscard]] inline std::vector<Rung> rungs(std::span<const double> t) {
  std::vector<std::size_t> order(t.size());
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::sort(order.begin(), order.end(),
            [&](std::size_t a, std::size_t b) { return std::abs(t[a]) < std::abs(t[b]); });
  std::vector<Rung> all;
  for (const std::size_t k : order) {
    const double step = std::abs(t[k]);
    // The two of a pair may differ where the step is a few last places of the parameter.
    const bool joins = !all.empty() && step <= 1.05 * all.back().step &&
                       (t[k] > 0.0 ? all.back().plus : all.back().minus) < 0;
    if (!joins) all.push_back({.step = step});
    (t[k] > 0.0 ? all.back().plus : all.back().minus) = static_cast<Eigen::Index>(k);
  }
  return all;
}

/// Consecutive rungs `first` ... `last` of a family, and where its neighbours stand.
struct Window {
  int family{};         ///< 0: both sides, 1: the plus side, 2: the minus side
  std::size_t first{};  ///< in the rungs of the family
  std::size_t last{};
  bool paired{};           ///< pairs only
  double bottom{}, top{};  ///< smallest and largest step
  double gain{};           ///< product of the gains of its rungs, in units of the ladder's top
  Eigen::Index neighbour{
      -1};  ///< without the largest rung; of a single rung: with the next smaller

  [[nodiscard]] std::size_t length() const noexcept { return last - first + 1; }
};

/// All windows over a set of nodes with their weights, which all elements of a data vector share.
class Windows {
 public:
  static constexpr std::size_t longest_mixed = 6, longest_single = 9;

  explicit Windows(const std::vector<double>& t) : t_(t) {
    families_[0] = rungs(t);
    const bool pairs = std::any_of(families_[0].begin(), families_[0].end(),
                                   [](const Rung& rung) { return rung.paired(); });
    const bool both = pairs || (std::any_of(t.begin(), t.end(), [](double s) { return s > 0.0; }) &&
                                std::any_of(t.begin(), t.end(), [](double s) { return s < 0.0; }));
    if (both) {
      for (const Rung& rung : families_[0]) {
        if (rung.plus >= 0) families_[1].push_back({.step = rung.step, .plus = rung.plus});
        if (rung.minus >= 0) families_[2].push_back({.step = rung.step, .minus = rung.minus});
      }
    }
    for (int family = 0; family < 3; ++family) {
      add_family(family, family == 0 && both ? longest_mixed : longest_single);
    }
    fill_weights();
    fill_contrasts();
    by_top_.resize(all_.size());
    std::iota(by_top_.begin(), by_top_.end(), Eigen::Index{0});
    std::stable_sort(by_top_.begin(), by_top_.end(), [&](Eigen::Index a, Eigen::Index b) {
      return (*this)[a].top < (*this)[b].top;
    });
  }

  [[nodiscard]] Eigen::Index size() const noexcept {
    return static_cast<Eigen::Index>(all_.size());
  }
  [[nodiscard]] const Window& operator[](Eigen::Index m) const {
    return all_[static_cast<std::size_t>(m)];
  }
  /// The position of the window first ... last of a family, which must exist.
  [[nodiscard]] Eigen::Index find(int family, std::size_t first, std::size_t last) const {
    return starts_[static_cast<std::size_t>(family)][first] +
           static_cast<Eigen::Index>(last - first);
  }
  /// The rungs of a family, in order of their step.
  [[nodiscard]] const std::vector<Rung>& rungs_of(int family) const {
    return families_[static_cast<std::size_t>(family)];
  }
  /// The windows in order of their largest step.
  [[nodiscard]] const std::vector<Eigen::Index>& by_top() const noexcept { return by_top_; }

  /// Nodes x windows: the derivative of window m is the product of column m with the differences
  /// from the fiducial point, whose own weight is `origin_weights`.
  [[nodiscard]] const Eigen::MatrixXd& weights() const noexcept { return weights_; }
  [[nodiscard]] const Eigen::VectorXd& origin_weights() const noexcept { return origin_; }

  /// Nodes x contrasts: highest divided differences of the mixed windows of two rungs or more, with
  /// the fiducial point (even) and without it (odd, where all is paired).
  [[nodiscard]] const Eigen::MatrixXd& even_contrasts() const noexcept { return even_; }
  [[nodiscard]] const Eigen::VectorXd& even_origin() const noexcept { return even_origin_; }
  [[nodiscard]] const Eigen::MatrixXd& odd_contrasts() const noexcept { return odd_; }
  /// The window each contrast belongs to.
  [[nodiscard]] const std::vector<Eigen::Index>& contrast_windows() const noexcept {
    return contrast_windows_;
  }

 private:
  void add_family(int family, std::size_t longest) {
    const std::vector<Rung>& rungs = families_[static_cast<std::size_t>(family)];
    const double unit = rungs.empty() ? 1.0 : rungs.back().step;
    auto& starts = starts_[static_cast<std::size_t>(family)];
    for (std::size_t first = 0; first < rungs.size(); ++first) {
      starts.push_back(static_cast<Eigen::Index>(all_.size()));
      Window window{.family = family, .first = first, .paired = true, .gain = 1.0};
      window.bottom = rungs[first].step;
      for (std::size_t last = first; last < std::min(first + longest, rungs.size()); ++last) {
        window.last = last;
        window.top = rungs[last].step;
        window.paired = window.paired && rungs[last].paired();
        window.gain *= rungs[last].gain() / (rungs[last].paired() ? unit * unit : unit);
        if (last > first) {
          window.neighbour = static_cast<Eigen::Index>(all_.size()) - 1;
        } else if (first > 0) {
          window.neighbour = starts[first - 1] + 1;
        } else if (rungs.size() > 1) {
          window.neighbour = static_cast<Eigen::Index>(all_.size()) + 1;
        }
        all_.push_back(window);
      }
    }
  }

  [[nodiscard]] std::vector<Eigen::Index> nodes(const Window& window) const {
    std::vector<Eigen::Index> members;
    for (std::size_t r = window.first; r <= window.last; ++r) {
      const Rung& rung = rungs_of(window.family)[r];
      if (rung.plus >= 0) members.push_back(rung.plus);
      if (rung.minus >= 0) members.push_back(rung.minus);
    }
    return members;
  }

  void fill_weights() {
    const auto count = static_cast<Eigen::Index>(t_.size());
    weights_ = Eigen::MatrixXd::Zero(count, size());
    origin_ = Eigen::VectorXd::Zero(size());
    std::vector<double> steps;
    for (Eigen::Index m = 0; m < size(); ++m) {
      const std::vector<Eigen::Index> members = nodes((*this)[m]);
      steps.clear();
      for (const Eigen::Index k : members) steps.push_back(t_[static_cast<std::size_t>(k)]);
      const Eigen::VectorXd w = derivative_weights(steps);
      for (std::size_t k = 0; k < members.size(); ++k) {
        weights_(members[k], m) = w(static_cast<Eigen::Index>(k));
      }
      for (Eigen::Index k = 0; k < count; ++k) origin_(m) -= weights_(k, m);
    }
  }

  void fill_contrasts() {
    for (Eigen::Index m = 0; m < size(); ++m) {
      if ((*this)[m].family == 0 && (*this)[m].length() >= 2) contrast_windows_.push_back(m);
    }
    const auto nodes_in_all = static_cast<Eigen::Index>(t_.size());
    const auto count = static_cast<Eigen::Index>(contrast_windows_.size());
    even_ = odd_ = Eigen::MatrixXd::Zero(nodes_in_all, count);
    even_origin_ = Eigen::VectorXd::Zero(count);
    std::vector<double> steps;
    for (Eigen::Index c = 0; c < count; ++c) {
      const std::vector<Eigen::Index> members =
          nodes((*this)[contrast_windows_[static_cast<std::size_t>(c)]]);
      steps.clear();
      for (const Eigen::Index k : members) steps.push_back(t_[static_cast<std::size_t>(k)]);
      const Eigen::VectorXd odd = difference_weights(steps);
      steps.push_back(0.0);
      const Eigen::VectorXd even = difference_weights(steps);
      for (std::size_t k = 0; k < members.size(); ++k) {
        odd_(members[k], c) = odd(static_cast<Eigen::Index>(k));
        even_(members[k], c) = even(static_cast<Eigen::Index>(k));
      }
      even_origin_(c) = even(even.size() - 1);
    }
  }

  std::vector<double> t_;
  std::array<std::vector<Rung>, 3> families_;
  std::array<std::vector<Eigen::Index>, 3> starts_;
  std::vector<Window> all_;
  std::vector<Eigen::Index> by_top_;
  Eigen::MatrixXd weights_;
  Eigen::VectorXd origin_;
  std::vector<Eigen::Index> contrast_windows_;
  Eigen::MatrixXd even_, odd_;
  Eigen::VectorXd even_origin_;
};

}  // namespace whet::detail

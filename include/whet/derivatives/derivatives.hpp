#pragma once
/// The derivatives of an observable at the fiducial point, each with its error: what the
/// evaluations bought, kept as a value.

#include <cmath>
#include <string>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/parameters/parameters.hpp>
#include <whet/support/error.hpp>

namespace whet {

/// How the derivatives by one parameter came out.
enum class DerivativeStatus {
  exact,          ///< by dual numbers: only rounding
  given,          ///< made elsewhere
  converged,      ///< to the accuracy asked for
  noise_limited,  ///< the noise of the code stands between the steps and the accuracy asked for
  rounded,        ///< the code's output is rounded, and that limits the accuracy
  flat,           ///< nothing moves wherever the parameter goes
  kink,           ///< a kink or jump at the fiducial value, in the elements named
  unresolved,     ///< structure finer than any step tried
  budget_spent,   ///< stopped by the number of evaluations allowed
};

namespace detail {

/// What limits a column of derivatives.
[[nodiscard]] inline std::string in_words(DerivativeStatus status) {
  switch (status) {
    case DerivativeStatus::exact:
      return "exact, but for rounding";
    case DerivativeStatus::given:
      return "as given";
    case DerivativeStatus::converged:
      return "rounding";
    case DerivativeStatus::noise_limited:
      return "noise of the code";
    case DerivativeStatus::rounded:
      return "rounded output";
    case DerivativeStatus::flat:
      return "nothing moves";
    case DerivativeStatus::kink:
      return "a kink or jump";
    case DerivativeStatus::unresolved:
      return "structure not resolved";
    case DerivativeStatus::budget_spent:
      return "the calls allowed are spent";
  }
  return {};
}

}  // namespace detail

/// What is known of how one column of derivatives was made.
struct DerivativeReport {
  DerivativeStatus status{DerivativeStatus::given};
  /// A sentence for a person, e.g. "one-sided: the domain ends at 0"; empty: nothing to say.
  std::string note{};
  /// The elements concerned, for a kink or unresolved structure.
  std::vector<Eigen::Index> elements{};
  /// Calls of the observable for this parameter, the shared fiducial one not counted.
  int evaluations{0};
  /// The noise was shown to be independent from element to element.
  bool independent_noise{false};

  bool operator==(const DerivativeReport&) const = default;
};

/// Derivatives d mu_i / d theta_p at the fiducial point, n elements by P parameters, with their
/// errors. An immutable value; stands in place of an observable in every likelihood. Copies share
/// nothing: n x P doubles three times.
class Derivatives {
 public:
  /// Everything a Derivatives holds; see the accessors. `truncation` and `noise` may be left empty
  /// for zero.
  struct Parts {
    Parameters parameters{};
    Eigen::VectorXd mean{};
    Eigen::MatrixXd values{};
    Eigen::MatrixXd truncation{};
    Eigen::MatrixXd noise{};
    bool signs_known{false};
    std::vector<std::string> labels{};
    std::vector<DerivativeReport> reports{};
    int evaluations{0};
    int rounds{0};
  };

  /// Derivatives made elsewhere.
  /// @param parameters  P parameters with the fiducial values the derivatives were taken at
  /// @param mean        n, the data vector at the fiducial point
  /// @param values      n x P, column p by parameter p, in unit of datum / unit of parameter
  /// @param errors      n x P, the size of the error of each value, >= 0; empty: none but rounding
  /// @throws DerivativeError on sizes that differ, or an entry that is not finite, by element and
  ///   parameter
  Derivatives(Parameters parameters, Eigen::VectorXd mean, Eigen::MatrixXd values,
              Eigen::MatrixXd errors = {})
      : Derivatives(Parts{.parameters = std::move(parameters),
                          .mean = std::move(mean),
                          .values = std::move(values),
                          .truncation = std::move(errors)}) {}

  /// Derivatives from all their parts. @throws DerivativeError as above
  explicit Derivatives(Parts parts) : parts_(std::move(parts)) {
    const Eigen::Index n = parts_.mean.size(), count = parts_.parameters.size();
    if (parts_.truncation.size() == 0) parts_.truncation = Eigen::MatrixXd::Zero(n, count);
    if (parts_.noise.size() == 0) parts_.noise = Eigen::MatrixXd::Zero(n, count);
    check_matrix("values", parts_.values, false);
    check_matrix("errors", parts_.truncation, !parts_.signs_known);
    check_matrix("noise", parts_.noise, true);
    for (Eigen::Index i = 0; i < n; ++i) {
      if (!std::isfinite(parts_.mean(i))) {
        refuse("mean", "an element that is not finite", "finite numbers");
      }
    }
    if (!parts_.labels.empty() && static_cast<Eigen::Index>(parts_.labels.size()) != n) {
      refuse("labels", detail::text(parts_.labels.size()), detail::text(n) + ", one an element");
    }
    if (parts_.reports.empty()) parts_.reports.resize(static_cast<std::size_t>(count));
    if (static_cast<Eigen::Index>(parts_.reports.size()) != count) {
      refuse("reports", detail::text(parts_.reports.size()), "one a parameter");
    }
  }

  [[nodiscard]] const Parameters& parameters() const noexcept { return parts_.parameters; }
  /// The data vector at the fiducial point, n.
  [[nodiscard]] const Eigen::VectorXd& mean() const noexcept { return parts_.mean; }
  /// The derivatives, n x P, in unit of datum / unit of parameter.
  [[nodiscard]] const Eigen::MatrixXd& values() const noexcept { return parts_.values; }
  /// A bound on the error of each derivative, n x P, same units. Rounding of the observable's own
  /// arithmetic is in it where it was seen; exact derivatives have zeros.
  [[nodiscard]] Eigen::MatrixXd errors() const {
    Eigen::MatrixXd all = parts_.noise;
    for (Eigen::Index p = 0; p < all.cols(); ++p) {
      for (Eigen::Index i = 0; i < all.rows(); ++i) all(i, p) += std::abs(parts_.truncation(i, p));
    }
    return all;
  }
  /// The part of the error that comes from steps of finite size, n x P, signed where `signs_known`:
  /// neighbouring elements err alike, and correlated data notice.
  [[nodiscard]] const Eigen::MatrixXd& truncation() const noexcept { return parts_.truncation; }
  [[nodiscard]] bool signs_known() const noexcept { return parts_.signs_known; }
  /// The part of the error that comes from the noise of the code, n x P, >= 0: a bound, of three
  /// standard deviations or more, also where a report says that it is independent.
  [[nodiscard]] const Eigen::MatrixXd& noise() const noexcept { return parts_.noise; }
  /// Names of the elements for messages; empty: none were given.
  [[nodiscard]] const std::vector<std::string>& labels() const noexcept { return parts_.labels; }
  /// How each column was made, in the order of the parameters.
  [[nodiscard]] const std::vector<DerivativeReport>& reports() const noexcept {
    return parts_.reports;
  }
  /// Calls of the observable in all, and the batches they came in.
  [[nodiscard]] int evaluations() const noexcept { return parts_.evaluations; }
  [[nodiscard]] int rounds() const noexcept { return parts_.rounds; }

  [[nodiscard]] const Parts& parts() const noexcept { return parts_; }

 private:
  [[noreturn]] static void refuse(std::string what, std::string got, std::string expected) {
    detail::fail<DerivativeError>({.where = "Derivatives",
                                   .what = std::move(what),
                                   .got = std::move(got),
                                   .expected = std::move(expected)});
  }
  void check_matrix(const std::string& what, const Eigen::MatrixXd& matrix, bool sizes) const {
    const Eigen::Index n = parts_.mean.size(), count = parts_.parameters.size();
    if (matrix.rows() != n || matrix.cols() != count) {
      refuse(what, detail::text(matrix.rows()) + " x " + detail::text(matrix.cols()),
             detail::text(n) + " x " + detail::text(count) + ", elements by parameters");
    }
    for (Eigen::Index p = 0; p < count; ++p) {
      for (Eigen::Index i = 0; i < n; ++i) {
        if (std::isfinite(matrix(i, p)) && (!sizes || matrix(i, p) >= 0.0)) continue;
        refuse(what + ", element " + detail::text(i) + ", parameter " +
                   detail::in_quotes(parts_.parameters[p].name),
               detail::text(matrix(i, p)), sizes ? "a finite size >= 0" : "a finite value");
      }
    }
  }

  Parts parts_;
};

}  // namespace whet

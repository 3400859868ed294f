#pragma once
/// The information that experiments hold on named parameters, as a square root with its errors.

#include <algorithm>
#include <cmath>
#include <initializer_list>
#include <limits>
#include <map>
#include <string>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/information/gaussian_prior.hpp>
#include <whet/information/root_information.hpp>
#include <whet/parameters/parameters.hpp>
#include <whet/support/error.hpp>

namespace whet {

/// Why an information no longer knows a parameter that it once had.
enum class Absence { integrated_out, held, replaced };

/// How a matrix was given.
struct GivenOptions {
  /// Significant digits of its elements: what was printed is off by up to half a unit of the last
  /// one, and the forecast says how much that matters. 0: double precision.
  int digits{0};
  /// Name of the experiment, so that it cannot count twice; empty: none.
  std::string name{};
};

/// Fisher information F = R^T R on named parameters, kept as R. It carries the numerical errors of
/// what went into it, shifts of the data by systematics, and the memory of what was integrated out,
/// held or replaced, and of the experiments in it, so that no sum of two is silently wrong. An
/// immutable value.
class Information {
 public:
  /// Everything an Information holds.
  struct Parts {
    Parameters parameters{};
    RootInformation root{0};
    /// Names of the shifts, in the order of their columns.
    std::vector<std::string> shifts{};
    std::map<std::string, Absence> absent{};
    /// Names of the experiments in it; unnamed ones are not listed.
    std::vector<std::string> experiments{};
    /// A prior was joined.
    bool has_prior{false};
    /// What weakens the result, in sentences.
    std::vector<std::string> notes{};
  };

  /// @throws ParameterError if the sizes of the parts differ, or there is no parameter
  explicit Information(Parts parts) : parts_(std::move(parts)) {
    if (parts_.parameters.empty()) {
      detail::fail<ParameterError>({.where = "Information",
                                    .what = "number of parameters",
                                    .got = "0",
                                    .expected = "at least one"});
    }
    if (parts_.parameters.size() != parts_.root.parameters() ||
        static_cast<Eigen::Index>(parts_.shifts.size()) != parts_.root.shifts()) {
      detail::fail<ParameterError>({.where = "Information",
                                    .what = "size of the root",
                                    .got = detail::text(parts_.root.parameters()) +
                                           " parameters and " + detail::text(parts_.root.shifts()) +
                                           " shifts",
                                    .expected = detail::text(parts_.parameters.size()) + " and " +
                                                detail::text(parts_.shifts.size())});
    }
  }

  /// Information that came as a matrix: from a paper, a colleague, a Hessian.
  /// @param matrix  F, P x P, symmetric, positive semidefinite to its digits; element (i, j) in
  ///   1 / (unit of i times unit of j)
  /// @throws CovarianceError if it is not that, naming the element or the direction
  template <class Derived>
  [[nodiscard]] static Information from_matrix(const Parameters& parameters,
                                               const Eigen::MatrixBase<Derived>& matrix,
                                               const GivenOptions& options = {});
  /// Information that came as a parameter covariance C, P x P, symmetric positive definite.
  /// @throws CovarianceError as DenseCovariance
  template <class Derived>
  [[nodiscard]] static Information from_covariance(const Parameters& parameters,
                                                   const Eigen::MatrixBase<Derived>& covariance,
                                                   const GivenOptions& options = {});

  [[nodiscard]] const Parameters& parameters() const noexcept { return parts_.parameters; }
  /// R, P x P, upper triangular, R_ii >= 0; columns in 1 / unit of the parameter.
  [[nodiscard]] Eigen::MatrixXd root() const { return parts_.root.root(); }
  /// The Fisher matrix F = R^T R, P x P. For looking at: whet computes from R.
  [[nodiscard]] Eigen::MatrixXd matrix() const { return parts_.root.matrix(); }
  /// What weakens the result, in sentences; the table prints them.
  [[nodiscard]] const std::vector<std::string>& notes() const noexcept { return parts_.notes; }
  [[nodiscard]] const Parts& parts() const noexcept { return parts_; }

  /// The information on the other parameters with these integrated out (marginalised): the sigmas
  /// of the others stay. Directions of these that nothing measures take nothing from the others.
  /// @throws ParameterError on a name that is not there or stands twice, or when none is left
  [[nodiscard]] Information integrating_out(const std::vector<std::string>& names) const {
    const auto which = places("integrating_out", names);
    Information left = without(which, parts_.root.integrating_out(which), Absence::integrated_out);
    const RootInformation alone =
        parts_.root.holding(detail::all_but(parts_.parameters.size(), which));
    for (const double bound :
         detail::find_null_space<double>(alone.root(), alone.errors()).bounds) {
      if (bound == 0.0) continue;  // columns of zeros, known to be that
      left.parts_.notes.push_back("integrating out " + detail::listed(names) +
                                  ": a direction among them is not measured above the numerical "
                                  "error, and was taken as one that the data do not depend on");
      break;
    }
    return left;
  }

  /// The information on the other parameters with these held at their fiducial values.
  /// @throws ParameterError as above
  [[nodiscard]] Information holding(const std::vector<std::string>& names) const {
    const auto which = places("holding", names);
    return without(which, parts_.root.holding(which), Absence::held);
  }

  /// k times the readings, time or area of everything in it: R sqrt(k).
  /// @throws ParameterError if k is not finite and positive, or a prior was joined: it would be
  ///   repeated too
  [[nodiscard]] Information repeated(double k) const {
    if (!(std::isfinite(k) && k > 0.0)) {
      detail::fail<ParameterError>({.where = "repeated",
                                    .what = "the number of times",
                                    .got = detail::text(k),
                                    .expected = "a finite value > 0"});
    }
    if (parts_.has_prior) {
      detail::fail<ParameterError>({.where = "repeated",
                                    .what = "the information holds a prior, which is not repeated",
                                    .advice = "Repeat first, then join the prior."});
    }
    Parts changed = parts_;
    changed.root = parts_.root.repeated(k);
    return Information(std::move(changed));
  }

  /// The information on new parameters in place of some: the old ones as functions of the new; the
  /// parameters not named stay. F' = J^T F J with J = d old / d new.
  /// @param old      names to replace
  /// @param fresh    the new parameters, which take the place of the first old one
  /// @param function  from a point of the new parameters to the values of the old ones, in the
  /// order
  ///   of `old`: an Observable, best marked `exact`. Numerical derivatives carry their error along.
  /// @throws ParameterError if `function` at the new fiducial values does not give the old ones to
  ///   1e-10, if the Jacobian is singular, or on names that are not there or clash
  template <class F>
  [[nodiscard]] Information replacing(const std::vector<std::string>& old, const Parameters& fresh,
                                      const F& function) const;

  /// All that two experiments, independent of each other, hold together; parameters are matched by
  /// name, others are added. Commutes and associates.
  /// @throws ParameterError by name where one side still knows a parameter that the other has
  ///   integrated out, held or replaced, where both have integrated out or
  ///   replaced the same name, where
  ///   fiducial values or units differ, or where an experiment of the same name would count twice
  friend Information operator+(const Information& a, const Information& b);

  /// The information with a prior joined.
  /// @throws ParameterError if it does not know a parameter of the prior
  friend Information operator+(const Information& information, const GaussianPrior& prior);
  friend Information operator+(const GaussianPrior& prior, const Information& information) {
    return information + prior;
  }

 private:
  /// Positions of names, each there and given once.
  [[nodiscard]] std::vector<Eigen::Index> places(const std::string& where,
                                                 const std::vector<std::string>& names) const {
    std::vector<Eigen::Index> which;
    for (const std::string& name : names) {
      const Eigen::Index place = place_of(where, name);
      if (std::find(which.begin(), which.end(), place) != which.end()) {
        detail::fail<ParameterError>(
            {.where = where, .what = "parameter " + detail::in_quotes(name) + " is given twice"});
      }
      which.push_back(place);
    }
    return which;
  }

  [[nodiscard]] Eigen::Index place_of(const std::string& where, const std::string& name) const;

  [[nodiscard]] Information without(const std::vector<Eigen::Index>& which, RootInformation root,
                                    Absence absence) const {
    Parts changed = parts_;
    changed.root = std::move(root);
    std::vector<Parameter> left;
    for (const Eigen::Index i : detail::all_but(parts_.parameters.size(), which)) {
      left.push_back(parts_.parameters[i]);
    }
    for (const Eigen::Index i : which) changed.absent[parts_.parameters[i].name] = absence;
    changed.parameters = Parameters(std::move(left));
    return Information(std::move(changed));
  }

  Parts parts_;
};

namespace detail {

[[nodiscard]] inline std::string in_words(Absence absence) {
  switch (absence) {
    case Absence::integrated_out:
      return "integrated out";
    case Absence::held:
      return "held";
    case Absence::replaced:
      return "replaced";
  }
  return {};
}

/// Refuse a parameter that an information once had.
inline void refuse_absent(const std::string& where, const Information::Parts& parts,
                          const std::string& name, const std::string& advice) {
  const auto absent = parts.absent.find(name);
  if (absent == parts.absent.end()) return;
  fail<ParameterError>({.where = where,
                        .what = "parameter " + in_quotes(name) + " was " +
                                in_words(absent->second) + " on one side and is known on the other",
                        .advice = advice});
}

/// Refuse parameters of one name that are not the same.
inline void check_same(const std::string& where, const Parameter& a, const Parameter& b) {
  const double apart = std::abs(a.fiducial - b.fiducial);
  const double size = std::max(std::abs(a.fiducial), std::abs(b.fiducial));
  if (!(apart <= 4.0 * std::numeric_limits<double>::epsilon() * size)) {
    fail<ParameterError>({.where = where,
                          .what = "fiducial value of parameter " + in_quotes(a.name),
                          .got = text(a.fiducial) + " and " + text(b.fiducial),
                          .expected = "the same on both sides",
                          .advice = "Make both forecasts at one fiducial model."});
  }
  if (a.unit != b.unit) {
    fail<ParameterError>({.where = where,
                          .what = "unit of parameter " + in_quotes(a.name),
                          .got = in_quotes(a.unit) + " and " + in_quotes(b.unit),
                          .expected = "the same on both sides",
                          .advice = "Use replacing() to change the unit of one."});
  }
}

/// Append what is not there yet.
inline void unite(std::vector<std::string>& all, const std::vector<std::string>& more) {
  for (const std::string& each : more) {
    if (std::find(all.begin(), all.end(), each) == all.end()) all.push_back(each);
  }
}

/// Put the columns of one side where the union has them, and fold them and their errors in.
inline void fold_aligned(RootInformation& root, const Information::Parts& all,
                         const Information::Parts& side) {
  const Eigen::MatrixXd& from = side.root.root_with_shifts();
  const Eigen::Index count = side.parameters.size();
  Eigen::MatrixXd rows = Eigen::MatrixXd::Zero(from.rows(), root.parameters() + root.shifts());
  Eigen::MatrixXd selection = Eigen::MatrixXd::Zero(count, root.parameters());
  for (Eigen::Index j = 0; j < count; ++j) {
    const Eigen::Index place = all.parameters.index(side.parameters[j].name);
    rows.col(place) = from.col(j);
    selection(j, place) = 1.0;
  }
  for (std::size_t s = 0; s < side.shifts.size(); ++s) {
    const auto place = std::find(all.shifts.begin(), all.shifts.end(), side.shifts[s]);
    rows.col(root.parameters() + (place - all.shifts.begin())) =
        from.col(count + static_cast<Eigen::Index>(s));
  }
  root.fold(rows);
  root.add(side.root.errors().through(selection));
}

}  // namespace detail

inline Eigen::Index Information::place_of(const std::string& where, const std::string& name) const {
  if (parts_.parameters.contains(name)) return parts_.parameters.index(name);
  const auto absent = parts_.absent.find(name);
  if (absent != parts_.absent.end()) {
    detail::fail<ParameterError>({.where = where,
                                  .what = "parameter " + detail::in_quotes(name) + " was " +
                                          detail::in_words(absent->second) + " before; left are " +
                                          detail::listed(parts_.parameters.names()),
                                  .advice = "Do this first."});
  }
  parts_.parameters.table()->unknown(where, name);
}

inline Information operator+(const Information& a, const Information& b) {
  const Information::Parts& left = a.parts_;
  const Information::Parts& right = b.parts_;
  const std::string advice =
      "Join first, then integrate out or hold: the sum would otherwise treat it as two parameters.";
  for (const Parameter& p : left.parameters)
    detail::refuse_absent("joining", right, p.name, advice);
  for (const Parameter& p : right.parameters)
    detail::refuse_absent("joining", left, p.name, advice);
  Information::Parts all;
  all.absent = left.absent;
  for (const auto& [name, absence] : right.absent) {
    const auto [known, fresh] = all.absent.emplace(name, absence);
    if (fresh || (known->second == absence && absence == Absence::held)) continue;
    detail::fail<ParameterError>(
        {.where = "joining",
         .what = "parameter " + detail::in_quotes(name) + " was " +
                 detail::in_words(known->second) + " on one side and " + detail::in_words(absence) +
                 " on the other",
         .advice =
             "If it is one parameter, join first, then integrate out; if it is two, give them "
             "two names."});
  }
  for (const std::string& name : right.experiments) {
    if (std::find(left.experiments.begin(), left.experiments.end(), name) ==
        left.experiments.end()) {
      continue;
    }
    detail::fail<ParameterError>(
        {.where = "joining",
         .what = "experiment " + detail::in_quotes(name) + " would count twice",
         .advice = "Use repeated() for more of the same, or another name."});
  }
  std::vector<Parameter> list(left.parameters.begin(), left.parameters.end());
  for (const Parameter& p : right.parameters) {
    if (left.parameters.contains(p.name)) {
      detail::check_same("joining", left.parameters[p.name], p);
    } else {
      list.push_back(p);
    }
  }
  all.parameters = Parameters(std::move(list));
  all.shifts = left.shifts;
  detail::unite(all.shifts, right.shifts);
  all.experiments = left.experiments;
  detail::unite(all.experiments, right.experiments);
  all.notes = left.notes;
  detail::unite(all.notes, right.notes);
  all.has_prior = left.has_prior || right.has_prior;
  if (left.has_prior && right.has_prior) {
    detail::unite(all.notes, {"both sides of a sum hold a prior: one on the same parameter counts "
                              "twice; join experiments first, then the prior"});
  }
  RootInformation root(all.parameters.size(), static_cast<Eigen::Index>(all.shifts.size()));
  detail::fold_aligned(root, all, left);
  detail::fold_aligned(root, all, right);
  all.root = std::move(root);
  return Information(std::move(all));
}

inline Information operator+(const Information& information, const GaussianPrior& prior) {
  Information::Parts changed = information.parts_;
  const Eigen::Index count = prior.rows().rows();
  RootInformation known(changed.root.parameters(), changed.root.shifts());
  Eigen::MatrixXd rows = Eigen::MatrixXd::Zero(count, known.root_with_shifts().cols());
  Eigen::MatrixXd selection = Eigen::MatrixXd::Zero(count, known.parameters());
  for (Eigen::Index i = 0; i < count; ++i) {
    const std::string& name = prior.names()[static_cast<std::size_t>(i)];
    const Eigen::Index place = information.place_of("joining a prior", name);
    rows.col(place) = prior.rows().col(i);
    selection(i, place) = 1.0;
  }
  known.fold(rows);
  known.add(prior.errors().through(selection));
  changed.root.merge(known);
  changed.has_prior = true;
  return Information(std::move(changed));
}

}  // namespace whet

#include <whet/information/given.hpp>
#include <whet/information/replacing.hpp>

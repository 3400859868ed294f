#pragma once
/// What is asked of an expected information.

#include <initializer_list>
#include <string>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/information/information.hpp>

namespace whet {

/// A shift of the data by a systematic that the model ignores.
struct Shift {
  /// The same name in several experiments is one systematic that moves all of them.
  std::string name{};
  /// n, in the unit of the data: data with the systematic minus data without.
  Eigen::VectorXd data{};

  Shift(std::string its_name, Eigen::VectorXd its_data)
      : name(std::move(its_name)), data(std::move(its_data)) {}
  Shift(std::string its_name, std::initializer_list<double> its_data)
      : Shift(std::move(its_name), std::vector<double>(its_data)) {}
  Shift(std::string its_name, const std::vector<double>& its_data)
      : name(std::move(its_name)),
        data(Eigen::Map<const Eigen::VectorXd>(its_data.data(),
                                               static_cast<Eigen::Index>(its_data.size()))) {}
};

/// Information from elsewhere: other probes and priors, one or a list of them.
class Given {
 public:
  Given() = default;
  // Implicit, so that `.given = bittern` and `.given = {bittern, prior}` read as they are meant.
  Given(Information information) : join_(&join) {  // NOLINT(google-explicit-constructor)
    informations_.push_back(std::move(information));
  }
  Given(GaussianPrior prior) : join_(&join) {  // NOLINT(google-explicit-constructor)
    priors_.push_back(std::move(prior));
  }
  Given(std::initializer_list<Given> list) : join_(&join) {
    for (const Given& each : list) {
      informations_.insert(informations_.end(), each.informations_.begin(),
                           each.informations_.end());
      priors_.insert(priors_.end(), each.priors_.begin(), each.priors_.end());
    }
  }

  /// The information with all of this joined.
  [[nodiscard]] Information joined_to(Information information) const {
    return join_ != nullptr ? join_(*this, std::move(information)) : information;
  }

 private:
  [[nodiscard]] static Information join(const Given& given, Information information) {
    for (const Information& each : given.informations_) information = information + each;
    for (const GaussianPrior& each : given.priors_) information = information + each;
    return information;
  }

  // Named by the constructors that give something: a program that gives nothing need not compile
  // it.
  Information (*join_)(const Given&, Information){nullptr};
  std::vector<Information> informations_{};
  std::vector<GaussianPrior> priors_{};
};

/// Options of `expected_information`.
struct InformationOptions {
  /// The numerical error allowed for each sigma of the forecast (with `given` joined), relative to
  /// it. (`differentiate` has an accuracy of another kind: of each column of derivatives.)
  double accuracy{1e-3};
  /// Information that the forecast will be joined with: derivatives are refined only as far as they
  /// matter beside it. It is no part of the result.
  Given given{};
  /// Systematics whose bias the forecast will be asked for.
  std::vector<Shift> shifts{};
  /// Name of the experiment, so that it cannot count twice; empty: none.
  std::string name{};
  /// Calls of the observable allowed for each parameter.
  int evaluations_per_parameter{48};
};

}  // namespace whet

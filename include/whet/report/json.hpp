#pragma once
/// Information and derivatives kept in files and read again, every bit of them.
///
/// The files are JSON (RFC 8259), UTF-8, an object of these fields, all of them required. A number
/// stands with the digits that give it back exactly; an infinity is the string "inf" or "-inf"; a
/// matrix is an array of its rows. The units are those of the objects: see there.
///
///     "format"      "whet information" or "whet derivatives"
///     "version"     1
///     "parameters"  in order: {"name", "fiducial", "lower", "upper", "scale", "label", "unit"}
///
/// and for information (P parameters, S shifts):
///
///     "shifts"       their names, S
///     "root"         R with the shifts last, (P + S) x (P + S), zeros below the diagonal
///     "errors"       the numerical errors: {"columns": sources, "matrices": [sources, ...]}, where
///                    K sources are {"sizes": K, "rows": K x P, "hidden": K,
///                     "lengths": K}
///     "absent"       what it once knew: [{"name", "why"}, ...]; why: "integrated_out", "held" or
///                    "replaced"
///     "experiments", "notes"            strings;  "has_prior": true or false
///
/// and for derivatives (n elements by P parameters):
///
///     "mean"         n
///     "values", "truncation", "noise"   n x P
///     "signs_known"  true or false
///     "labels"       n, or none
///     "reports"      P of {"status", "note", "elements", "evaluations", "independent_noise"};
///                    status: as the enumerators of DerivativeStatus are written
///     "evaluations", "rounds"           whole numbers
///
/// Other fields are passed over: a later whet may add what an older one can do without. Whatever an
/// older one would misread has another version, and is refused.

#include <filesystem>
#include <string>
#include <utility>
#include <vector>

#include <Eigen/Core>

#include <whet/derivatives/derivatives.hpp>
#include <whet/information/information.hpp>
#include <whet/report/json_document.hpp>
#include <whet/report/json_field.hpp>
#include <whet/report/whole_file.hpp>
#include <whet/support/text.hpp>

namespace whet {

namespace detail {

inline constexpr Spellings<Absence, 3> absences{{{Absence::integrated_out, "integrated_out"},
                                                 {Absence::held, "held"},
                                                 {Absence::replaced, "replaced"}}};
inline constexpr Spellings<DerivativeStatus, 9> statuses{
    {{DerivativeStatus::exact, "exact"},
     {DerivativeStatus::given, "given"},
     {DerivativeStatus::converged, "converged"},
     {DerivativeStatus::noise_limited, "noise_limited"},
     {DerivativeStatus::rounded, "rounded"},
     {DerivativeStatus::flat, "flat"},
     {DerivativeStatus::kink, "kink"},
     {DerivativeStatus::unresolved, "unresolved"},
     {DerivativeStatus::budget_spent, "budget_spent"}}};

[[nodiscard]] inline Json in_json(const Parameters& parameters) {
  Json::array_t all;
  for (const Parameter& p : parameters) {
    all.push_back({{"name", p.name},
                   {"fiducial", in_json(p.fiducial)},
                   {"lower", in_json(p.lower)},
                   {"upper", in_json(p.upper)},
                   {"scale", in_json(p.scale)},
                   {"label", p.label},
                   {"unit", p.unit}});
  }
  return all;
}

[[nodiscard]] inline Parameters parameters_in(const Field& field) {
  std::vector<Parameter> all;
  for (const Field& each : field.elements()) {
    all.push_back({.name = each["name"].text(),
                   .fiducial = each["fiducial"].number(),
                   .lower = each["lower"].number(),
                   .upper = each["upper"].number(),
                   .scale = each["scale"].number(),
                   .label = each["label"].text(),
                   .unit = each["unit"].text()});
  }
  return field.made([&] { return Parameters(all); });
}

[[nodiscard]] inline Json in_json(const ErrorSources& sources) {
  return {{"sizes", in_json(sources.sizes)},
          {"rows", in_json(sources.rows)},
          {"hidden", in_json(sources.hidden)},
          {"lengths", in_json(sources.lengths)}};
}

[[nodiscard]] inline ErrorSources sources_in(const Field& field, Eigen::Index parameters) {
  const Eigen::VectorXd sizes = field["sizes"].sizes();
  return {sizes, field["rows"].matrix(sizes.size(), parameters),
          field["hidden"].sizes(sizes.size()), field["lengths"].sizes(sizes.size())};
}

inline void check_kind(const Field& document, const std::string& format) {
  const Field kind = document["format"];
  if (kind.text() != format) kind.refuse(in_quotes(format), "Load it as what it is.");
  const Field version = document["version"];
  if (version.count() != 1) version.refuse("1", "Read it with the whet that wrote it.");
}

/// The errors that a root was given, none where only its rounding stands for them.
[[nodiscard]] inline NumericalErrors errors_given(RootInformation root) {
  const ErrorSources none = ErrorSources::none(root.parameters());
  root.add({none, {none}});  // now something was given, and stands at the end
  NumericalErrors errors = root.errors();
  errors.matrices.pop_back();
  return errors;
}

[[nodiscard]] inline Json in_json(const Information& information) {
  const Information::Parts& parts = information.parts();
  const NumericalErrors errors = errors_given(parts.root);
  Json::array_t matrices, absent;
  for (const ErrorSources& matrix : errors.matrices) matrices.push_back(in_json(matrix));
  for (const auto& [name, why] : parts.absent) {
    absent.push_back({{"name", name}, {"why", in_json(why, absences)}});
  }
  return {{"format", "whet information"},
          {"version", 1},
          {"parameters", in_json(parts.parameters)},
          {"shifts", parts.shifts},
          {"root", in_json(parts.root.root_with_shifts())},
          {"errors", {{"columns", in_json(errors.columns)}, {"matrices", std::move(matrices)}}},
          {"absent", std::move(absent)},
          {"experiments", parts.experiments},
          {"has_prior", parts.has_prior},
          {"notes", parts.notes}};
}

[[nodiscard]] inline Information information_in(const Field& document) {
  check_kind(document, "whet information");
  Information::Parts parts;
  parts.parameters = parameters_in(document["parameters"]);
  parts.shifts = document["shifts"].names();
  const Eigen::Index count = parts.parameters.size();
  const Eigen::Index all = count + static_cast<Eigen::Index>(parts.shifts.size());
  const Field errors = document["errors"], root = document["root"];
  NumericalErrors sources{sources_in(errors["columns"], count), {}};
  for (const Field& each : errors["matrices"].elements()) {
    sources.matrices.push_back(sources_in(each, count));
  }
  parts.root =
      root.made([&] { return RootInformation::from_root(root.matrix(all, all), count, sources); });
  for (const Field& each : document["absent"].elements()) {
    const std::string name = each["name"].text();
    const bool fresh = parts.absent.emplace(name, each["why"].one_of(absences)).second;
    if (!fresh || parts.parameters.contains(name)) {
      each["name"].refuse("a name that is neither there twice nor a parameter");
    }
  }
  parts.experiments = document["experiments"].names();
  parts.has_prior = document["has_prior"].flag();
  parts.notes = document["notes"].texts();
  return document.made([&] { return Information(parts); });
}

[[nodiscard]] inline Json in_json(const Derivatives& derivatives) {
  const Derivatives::Parts& parts = derivatives.parts();
  Json::array_t reports;
  for (const DerivativeReport& report : parts.reports) {
    reports.push_back({{"status", in_json(report.status, statuses)},
                       {"note", report.note},
                       {"elements", report.elements},
                       {"evaluations", report.evaluations},
                       {"independent_noise", report.independent_noise}});
  }
  return {{"format", "whet derivatives"},
          {"version", 1},
          {"parameters", in_json(parts.parameters)},
          {"mean", in_json(parts.mean)},
          {"values", in_json(parts.values)},
          {"truncation", in_json(parts.truncation)},
          {"noise", in_json(parts.noise)},
          {"signs_known", parts.signs_known},
          {"labels", parts.labels},
          {"reports", std::move(reports)},
          {"evaluations", parts.evaluations},
          {"rounds", parts.rounds}};
}

[[nodiscard]] inline Derivatives derivatives_in(const Field& document) {
  check_kind(document, "whet derivatives");
  Derivatives::Parts parts;
  parts.parameters = parameters_in(document["parameters"]);
  parts.mean = document["mean"].vector();
  const Eigen::Index n = parts.mean.size(), count = parts.parameters.size();
  parts.values = document["values"].matrix(n, count);
  parts.truncation = document["truncation"].matrix(n, count);
  parts.noise = document["noise"].matrix(n, count);
  parts.signs_known = document["signs_known"].flag();
  parts.labels = document["labels"].texts();
  for (const Field& each : document["reports"].elements(count)) {
    DerivativeReport report{.status = each["status"].one_of(statuses), .note = each["note"].text()};
    for (const Field& element : each["elements"].elements()) {
      report.elements.push_back(element.whole_number(0, n - 1));
    }
    report.evaluations = each["evaluations"].count();
    report.independent_noise = each["independent_noise"].flag();
    parts.reports.push_back(std::move(report));
  }
  parts.evaluations = document["evaluations"].count();
  parts.rounds = document["rounds"].count();
  return document.made([&] { return Derivatives(std::move(parts)); });
}

/// What could not be loaded again is not written: the document is read before.
template <class Object, class In>
void save_checked(const Object& object, const std::filesystem::path& path, const In& in) {
  const std::string file = path.string();
  const Json document = in_json(object);
  (void)in({document, file});
  write_file(path, lines(document, file));
}

template <class In>
[[nodiscard]] auto load(const std::filesystem::path& path, const In& in) {
  const std::string file = path.string();
  const Json document = parsed(read_file(path), file);
  return in({document, file});
}

}  // namespace detail

/// Keep information, or derivatives, in a file. What stood there is replaced at once and as a
/// whole, when the new file is on the disk: no crash, full disk or other writer leaves a damaged
/// one.
/// @throws FileError if it cannot be written, or holds what could not be loaded again (names that
///   are not UTF-8 or stand twice, errors that are NaN); the old file stays
inline void save(const Information& information, const std::filesystem::path& path) {
  detail::save_checked(information, path, detail::information_in);
}
inline void save(const Derivatives& derivatives, const std::filesystem::path& path) {
  detail::save_checked(derivatives, path, detail::derivatives_in);
}

/// What `save` kept, equal in every bit.
/// @throws FileError naming the file and the field if it is missing, damaged, inconsistent, of
///   another kind or of another version
[[nodiscard]] inline Information load_information(const std::filesystem::path& path) {
  return detail::load(path, detail::information_in);
}
[[nodiscard]] inline Derivatives load_derivatives(const std::filesystem::path& path) {
  return detail::load(path, detail::derivatives_in);
}

}  // namespace whet

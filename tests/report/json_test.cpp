#include <whet/report/json.hpp>

#include <bit>
#include <cmath>
#include <cstdint>
#include <functional>
#include <limits>
#include <random>
#include <string>
#include <utility>
#include <vector>

#include <doctest/doctest.h>

#include <whet/forecasts/forecast.hpp>
#include <whet/information/gaussian_prior.hpp>

#include <support/temporary_folder.hpp>

using whet::Absence;
using whet::Derivatives;
using whet::DerivativeStatus;
using whet::ErrorSources;
using whet::FileError;
using whet::Information;
using whet::Parameters;
using whet::test::put;
using whet::test::TemporaryFolder;
using whet::test::text_of;

namespace {

using Json = nlohmann::ordered_json;

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double denormal = std::numeric_limits<double>::denorm_min();

/// Equal in every bit: 0.0 and -0.0 differ.
bool same(double a, double b) {
  return std::bit_cast<std::uint64_t>(a) == std::bit_cast<std::uint64_t>(b);
}
bool same(const Eigen::MatrixXd& a, const Eigen::MatrixXd& b) {
  if (a.rows() != b.rows() || a.cols() != b.cols()) return false;
  for (Eigen::Index j = 0; j < a.cols(); ++j) {
    for (Eigen::Index i = 0; i < a.rows(); ++i) {
      if (!same(a(i, j), b(i, j))) return false;
    }
  }
  return true;
}
bool same(const Parameters& a, const Parameters& b) {
  for (Eigen::Index i = 0; a == b && i < a.size(); ++i) {
    if (!same(a[i].fiducial, b[i].fiducial) || !same(a[i].lower, b[i].lower) ||
        !same(a[i].upper, b[i].upper) || !same(a[i].scale, b[i].scale)) {
      return false;
    }
  }
  return a == b;
}
bool same(const ErrorSources& a, const ErrorSources& b) {
  return same(a.sizes, b.sizes) && same(a.rows, b.rows) && same(a.hidden, b.hidden) &&
         same(a.lengths, b.lengths);
}

void check_same(const Information& a, const Information& b) {
  const Information::Parts &x = a.parts(), &y = b.parts();
  CHECK(same(x.parameters, y.parameters));
  CHECK(x.root.parameters() == y.root.parameters());
  CHECK(same(x.root.root_with_shifts(), y.root.root_with_shifts()));
  const whet::NumericalErrors v = x.root.errors(), w = y.root.errors();
  CHECK(same(v.columns, w.columns));
  REQUIRE(v.matrices.size() == w.matrices.size());
  for (std::size_t i = 0; i < v.matrices.size(); ++i) CHECK(same(v.matrices[i], w.matrices[i]));
  CHECK(x.shifts == y.shifts);
  CHECK(x.absent == y.absent);
  CHECK(x.experiments == y.experiments);
  CHECK(x.has_prior == y.has_prior);
  CHECK(x.notes == y.notes);
}

void check_same(const Derivatives& a, const Derivatives& b) {
  const Derivatives::Parts &x = a.parts(), &y = b.parts();
  CHECK(same(x.parameters, y.parameters));
  CHECK(same(x.mean, y.mean));
  CHECK(same(x.values, y.values));
  CHECK(same(x.truncation, y.truncation));
  CHECK(same(x.noise, y.noise));
  CHECK(x.signs_known == y.signs_known);
  CHECK(x.labels == y.labels);
  CHECK(x.reports == y.reports);
  CHECK(x.evaluations == y.evaluations);
  CHECK(x.rounds == y.rounds);
}

/// Information with something of all that it can hold.
Information sandpiper() {
  Information::Parts parts;
  parts.parameters = {{.name = "rate",
                       .fiducial = 0.1,
                       .lower = 0.0,
                       .upper = 1.0 / 3.0,
                       .scale = 1e-300,
                       .label = R"(\Gamma_{0})",
                       .unit = "1/s"},
                      {.name = "\u03c3 \"8\"\n", .fiducial = -0.0, .upper = 2.0 * denormal},
                      {.name = "bias[0]", .fiducial = denormal, .lower = -1e308}};
  Eigen::MatrixXd root = Eigen::MatrixXd::Zero(5, 5);
  root.triangularView<Eigen::Upper>() = Eigen::MatrixXd::Constant(5, 5, 1.0 / 3.0);
  root(0, 1) = -0.0;
  root(0, 2) = -denormal;
  root(1, 2) = std::nextafter(1e23, 0.0);
  root(2, 2) = 5e-324;
  root(4, 0) = -0.0;
  Eigen::MatrixXd rows = Eigen::MatrixXd::Constant(4, 3, -1.0 / 7.0);
  rows(3, 2) = -infinity;
  const ErrorSources columns{Eigen::Vector4d(0.1, 0.0, infinity, denormal), rows,
                             Eigen::Vector4d(1.0 / 3.0, 0.0, infinity, 1e-320),
                             Eigen::Vector4d(2.0 / 3.0, 0.0, infinity, denormal)};
  const ErrorSources matrix{Eigen::Vector2d(1e-9, 0.7), rows.topRows(2), Eigen::Vector2d(0.1, 0.2),
                            Eigen::Vector2d(0.0, 0.3)};
  parts.root = whet::RootInformation::from_root(root, 3, {columns, {matrix, matrix}});
  parts.shifts = {"calibration", "blends"};
  parts.absent = {
      {"tilt", Absence::integrated_out}, {"depth", Absence::held}, {"h", Absence::replaced}};
  parts.experiments = {"Sandpiper", "Bittern"};
  parts.has_prior = true;
  parts.notes = {"a note, \"quoted\" \\ and\nbroken", ""};
  return Information(std::move(parts));
}

/// Derivatives with something of all that they can hold.
Derivatives plover() {
  Derivatives::Parts parts;
  for (int i = 0; i < 9; ++i) {
    parts.parameters = parts.parameters.with(
        whet::Parameter{.name = "p" + std::to_string(i), .fiducial = 1.0 / (i + 1)});
    parts.reports.push_back({.status = static_cast<DerivativeStatus>(i),
                             .note = i == 2 ? "one-sided: the domain ends at 0" : "",
                             .elements = {},
                             .evaluations = 3 * i,
                             .independent_noise = i % 2 == 0});
  }
  parts.reports[6].elements = {0, 3};
  parts.mean = Eigen::Vector4d(1.0 / 3.0, -0.0, denormal, -1.7976931348623157e308);
  parts.values = Eigen::MatrixXd::Constant(4, 9, 0.1);
  parts.values(2, 3) = -0.0;
  parts.truncation = Eigen::MatrixXd::Constant(4, 9, -1e-9);
  parts.noise = Eigen::MatrixXd::Constant(4, 9, 2e-320);
  parts.signs_known = true;
  parts.labels = {"l = 2", "l = 3", "l = 3", "\u2113 = 4"};
  parts.evaluations = 117;
  parts.rounds = 4;
  return Derivatives(std::move(parts));
}

/// A small information, whose file is quickly damaged in every place.
Information bittern() {
  Information::Parts parts;
  parts.parameters = {{.name = "h", .fiducial = 0.7}};
  parts.root = whet::RootInformation::from_root(Eigen::MatrixXd::Constant(1, 1, 20.0), 1,
                                                whet::NumericalErrors::none(1));
  parts.absent = {{"tilt", Absence::held}};
  return Information(std::move(parts));
}

/// What is refused of a document after a change, as "<file name>: ...".
template <class Load>
std::string complaint(const std::string& text, const Load& load) {
  const TemporaryFolder folder;
  put(folder / "kept.json", text);
  try {
    (void)load(folder / "kept.json");
  } catch (const FileError& error) {
    const std::string words = error.what();
    const std::string before = (folder / "").string();
    return words.starts_with(before) ? words.substr(before.size()) : "no file named: " + words;
  }
  return "nothing refused";
}

/// The same of information that was never in a file.
std::string complaint_about(const std::string& text) {
  const std::string file = "kept.json";
  try {
    const Json document = whet::detail::parsed(text, file);
    (void)whet::detail::information_in({document, file});
  } catch (const FileError& error) {
    return error.what();
  }
  return "nothing refused";
}

template <class Object>
std::string text_of_saved(const Object& object) {
  const TemporaryFolder folder;
  whet::save(object, folder / "kept.json");
  return text_of(folder / "kept.json");
}

std::string after(const std::function<void(Json&)>& change, Json document) {
  change(document);
  return document.dump();
}

std::string information_after(const std::function<void(Json&)>& change) {
  static const Json document = Json::parse(text_of_saved(sandpiper()));
  return complaint(after(change, document), whet::load_information);
}

std::string derivatives_after(const std::function<void(Json&)>& change) {
  static const Json document = Json::parse(text_of_saved(plover()));
  return complaint(after(change, document), whet::load_derivatives);
}

}  // namespace

TEST_CASE("Information comes back equal in every bit of every field, to the same bytes") {
  const TemporaryFolder folder;
  whet::save(sandpiper(), folder / "first.json");
  const Information again = whet::load_information(folder / "first.json");
  check_same(again, sandpiper());
  whet::save(again, folder / "second.json");
  CHECK(text_of(folder / "second.json") == text_of(folder / "first.json"));
  CHECK(folder.size() == 2);
}

TEST_CASE("Derivatives come back equal in every bit of every field, to the same bytes") {
  const TemporaryFolder folder;
  whet::save(plover(), folder / "first.json");
  const Derivatives again = whet::load_derivatives(folder / "first.json");
  check_same(again, plover());
  whet::save(again, folder / "second.json");
  CHECK(text_of(folder / "second.json") == text_of(folder / "first.json"));
}

TEST_CASE("Derivatives of no data, and by no parameter, come back as well") {
  const TemporaryFolder folder;
  const Derivatives no_data(Parameters{{.name = "h"}}, Eigen::VectorXd(0), Eigen::MatrixXd(0, 1));
  const Derivatives no_parameter(Parameters{}, Eigen::VectorXd::Ones(2), Eigen::MatrixXd(2, 0));
  for (const Derivatives& each : {no_data, no_parameter}) {
    whet::save(each, folder / "kept.json");
    check_same(whet::load_derivatives(folder / "kept.json"), each);
  }
}

TEST_CASE("A double of any bits that is finite comes back with the same bits") {
  std::mt19937_64 random(20240611);
  Eigen::MatrixXd values(2000, 5);
  for (double& each : values.reshaped()) {
    do each = std::bit_cast<double>(random());
    while (!std::isfinite(each));
  }
  values.col(0) *= 0x1p-1000;  // many denormals and zeros of both signs
  const Derivatives before(Parameters(whet::numbered("p", 5, {})), values.col(1), values);
  const TemporaryFolder folder;
  whet::save(before, folder / "kept.json");
  check_same(whet::load_derivatives(folder / "kept.json"), before);
}

TEST_CASE("A forecast from a file is the forecast itself, with its numerical errors and biases") {
  const TemporaryFolder folder;
  const Parameters parameters{{.name = "h", .fiducial = 0.7}, {.name = "omega", .fiducial = 0.3}};
  whet::RootInformation root(2, 1);
  Eigen::MatrixXd rows(4, 3);
  rows << 1.0, 0.3, 0.1, 0.2, 1.7, -0.4, 1.0 / 3.0, 0.9, 0.2, 0.1, 0.7, 0.3;
  root.fold(rows);
  root.add({ErrorSources::of_columns(Eigen::Vector2d(1e-4, 3e-5)), {}});
  const Information given = Information::from_matrix(
      parameters, Eigen::Matrix2d{{12.34, 5.678}, {5.678, 9.012}}, {.digits = 4});
  const Information both = Information({parameters, root, {"calibration"}}) + given;
  whet::save(both, folder / "kept.json");
  const Information again = whet::load_information(folder / "kept.json");
  CHECK(same(again.root(), both.root()));
  const whet::Forecast before(both), after(again);
  for (const std::string name : {"h", "omega"}) {
    CHECK(same(after.sigma(name), before.sigma(name)));
    CHECK(before.numerical_error(name) > 0.0);
    CHECK(same(after.numerical_error(name), before.numerical_error(name)));
    CHECK(same(after.bias(name, "calibration"), before.bias(name, "calibration")));
  }
}

TEST_CASE("What is joined after loading carries the same errors as without the file between") {
  // Where no errors were given, the rounding of the root stands for them, and grows with it.
  const TemporaryFolder folder;
  const Information before = bittern();
  whet::save(before, folder / "kept.json");
  const Information after = whet::load_information(folder / "kept.json");
  const whet::GaussianPrior prior("h", 1e-6);
  check_same(after + prior, before + prior);
}

TEST_CASE("A file says what it is and which version, a field, a parameter and a row a line") {
  const Derivatives small({{.name = "a", .fiducial = 1.0}, {.name = "b", .upper = 2.0}},
                          Eigen::Vector2d(0.1, -0.0),
                          Eigen::Matrix2d{{1.0, 1.0 / 3.0}, {1e300, -2.5e-7}});
  CHECK(text_of_saved(small) == R"({
"format": "whet derivatives",
"version": 1,
"parameters": [
{"name":"a","fiducial":1.0,"lower":"-inf","upper":"inf","scale":0.0,"label":"","unit":""},
{"name":"b","fiducial":0.0,"lower":"-inf","upper":2.0,"scale":0.0,"label":"","unit":""}
],
"mean": [0.1,-0.0],
"values": [
[1.0,0.3333333333333333],
[1e+300,-2.5e-07]
],
"truncation": [
[0.0,0.0],
[0.0,0.0]
],
"noise": [
[0.0,0.0],
[0.0,0.0]
],
"signs_known": false,
"labels": [],
"reports": [
{"status":"given","note":"","elements":[],"evaluations":0,"independent_noise":false},
{"status":"given","note":"","elements":[],"evaluations":0,"independent_noise":false}
],
"evaluations": 0,
"rounds": 0
}
)");
}

TEST_CASE("A file cut off anywhere is refused") {
  const std::string text = text_of_saved(bittern());
  for (std::size_t size = 0; size + 1 < text.size(); ++size) {  // the last character is a line end
    const std::string words = complaint_about(text.substr(0, size));
    if (!words.starts_with("kept.json: reading: got parse error")) FAIL(size << ": " << words);
  }
}

TEST_CASE("A file with a damaged character is read as what it says, or refused") {
  const std::string text = text_of_saved(bittern());
  int read = 0;
  for (std::size_t i = 0; i < text.size(); ++i) {
    for (const char wrong : {'\0', ' ', '"', '-', '0', '9', 'e', '[', ']', '}', ',', '\xff'}) {
      std::string damaged = text;
      damaged[i] = wrong;
      const std::string words = complaint_about(damaged);  // no other exception
      read += words == "nothing refused" ? 1 : 0;
      if (words != "nothing refused" && !words.starts_with("kept.json: ")) FAIL(words);
    }
  }
  CHECK(read > 0);  // a digit for a digit
}

TEST_CASE("A missing file, a folder and a file of something else are refused") {
  const TemporaryFolder folder;
  CHECK_THROWS_WITH_AS((void)whet::load_information(folder / "none.json"),
                       doctest::Contains("none.json: reading: got \"No such file"), FileError);
  CHECK_THROWS_WITH_AS((void)whet::load_derivatives(folder.path()),
                       doctest::Contains("reading: got \"Is a directory\""), FileError);
  const auto refused = [](const std::string& text) {
    return complaint(text, whet::load_information);
  };
  CHECK(refused("[1, 2]") == "kept.json: the document: got an array of 2, expected an object");
  CHECK(refused("{}") == "kept.json: format: got nothing, expected such a field");
  CHECK(refused(R"({"format": 3})") == "kept.json: format: got 3, expected a string");
  CHECK(refused(R"({"format": "a", "format": "b"})") ==
        R"(kept.json: field "format" stands twice)");
  CHECK(refused(text_of_saved(bittern()) + "}").find("expected end of input") != std::string::npos);
  CHECK(refused(R"({"format": NaN})").find("kept.json: reading: got parse error") == 0);
  CHECK(refused(R"({"format": 1e999})").find("number overflow") != std::string::npos);
  CHECK(refused(std::string(100000, '[')).find("kept.json: reading: got ") == 0);
  CHECK(refused('"' + std::string(100000, 'x')).size() < 400);
}

TEST_CASE("Derivatives are not information, nor the reverse") {
  CHECK(complaint(text_of_saved(plover()), whet::load_information) ==
        R"(kept.json: format: got "whet derivatives", expected "whet information". )"
        "Load it as what it is.");
  CHECK(complaint(text_of_saved(bittern()), whet::load_derivatives) ==
        R"(kept.json: format: got "whet information", expected "whet derivatives". )"
        "Load it as what it is.");
}

TEST_CASE("Another version is refused, further fields are passed over") {
  CHECK(information_after([](Json& j) { j["version"] = 2; }) ==
        "kept.json: version: got 2, expected 1. Read it with the whet that wrote it.");
  CHECK(derivatives_after([](Json& j) { j["version"] = 0; }).find("got 0, expected 1") !=
        std::string::npos);
  CHECK(information_after([](Json& j) {
          j["version"] = "1";
        }).find("version: got \"1\", expected a whole number") != std::string::npos);
  CHECK(information_after([](Json& j) { j["remark"] = {1, "x"}; }) == "nothing refused");
  CHECK(derivatives_after([](Json& j) { j["reports"][0]["remark"] = nullptr; }) ==
        "nothing refused");
}

TEST_CASE("Every field is needed") {
  const auto without = [](const auto& refused, const Json::json_pointer& parent) {
    return [&refused, parent](const std::string& field) {
      std::string place = parent.to_string() + "/" + field;
      const std::string words = refused([&](Json& j) { j[parent].erase(field); });
      CHECK_MESSAGE(words.find(field + ": got nothing, expected such a field") != std::string::npos,
                    words);
    };
  };
  const auto all_of = [&](const Json& document, const auto& refused, const std::string& pointer) {
    const Json::json_pointer parent(pointer);
    const auto check = without(refused, parent);
    for (const auto& [field, value] : document[parent].items()) check(field);
  };
  const Json information = Json::parse(text_of_saved(sandpiper()));
  for (const std::string at :
       {"", "/parameters/1", "/errors", "/errors/columns", "/errors/matrices/1", "/absent/0"}) {
    all_of(information, information_after, at);
  }
  const Json derivatives = Json::parse(text_of_saved(plover()));
  for (const std::string at : {"", "/parameters/8", "/reports/3"}) {
    all_of(derivatives, derivatives_after, at);
  }
}

TEST_CASE("A wrong parameter is refused by its field") {
  const auto refused = [](const char* field, const Json& value) {
    return information_after([&](Json& j) { j["parameters"][2][field] = value; });
  };
  CHECK(refused("fiducial", "seven") ==
        R"(kept.json: parameters[2].fiducial: got "seven", expected a number, "inf" or "-inf")");
  CHECK(refused("fiducial", nullptr) ==
        R"(kept.json: parameters[2].fiducial: got null, expected a number, "inf" or "-inf")");
  CHECK(refused("fiducial", "inf")
            .find("kept.json: parameters: Parameters: parameter \"bias[0]\", "
                  "fiducial: got inf, expected a finite value") == 0);
  CHECK(refused("lower", 3).find("fiducial: got") != std::string::npos);
  CHECK(refused("scale", -1.0).find("scale: got -1") != std::string::npos);
  CHECK(refused("name", "rate") ==
        "kept.json: parameters: Parameters: parameter \"rate\" is given "
        "twice. Names must differ.");
  CHECK(refused("unit", 1) == "kept.json: parameters[2].unit: got 1, expected a string");
  CHECK(information_after([](Json& j) { j["parameters"] = Json::object(); }) ==
        "kept.json: parameters: got an object, expected an array");
  CHECK(information_after([](Json& j) { j["parameters"][0] = 7; }) ==
        "kept.json: parameters[0]: got 7, expected an object");
}

TEST_CASE("Sizes that do not fit are refused by their field") {
  CHECK(information_after([](Json& j) { j["root"].erase(0); }) ==
        "kept.json: root: got an array of 4, expected an array of 5");
  CHECK(information_after([](Json& j) { j["root"][2].push_back(1.0); }) ==
        "kept.json: root[2]: got an array of 6, expected an array of 5");
  CHECK(information_after([](Json& j) { j["shifts"].erase(0); }) ==
        "kept.json: root: got an array of 5, expected an array of 4");
  CHECK(information_after([](Json& j) { j["errors"]["columns"]["sizes"].push_back(1.0); }) ==
        "kept.json: errors.columns.rows: got an array of 4, expected an array of 5");
  CHECK(information_after([](Json& j) { j["errors"]["matrices"][1]["rows"][0].erase(0); }) ==
        "kept.json: errors.matrices[1].rows[0]: got an array of 2, expected an array of 3");
  CHECK(information_after([](Json& j) { j["errors"]["columns"]["hidden"] = Json::array(); }) ==
        "kept.json: errors.columns.hidden: got an array of 0, expected an array of 4");
  CHECK(derivatives_after([](Json& j) { j["mean"].erase(0); }) ==
        "kept.json: values: got an array of 4, expected an array of 3");
  CHECK(derivatives_after([](Json& j) { j["noise"][3].erase(0); }) ==
        "kept.json: noise[3]: got an array of 8, expected an array of 9");
  CHECK(derivatives_after([](Json& j) { j["truncation"] = "none"; }) ==
        "kept.json: truncation: got \"none\", expected an array of 4");
  CHECK(derivatives_after([](Json& j) { j["reports"].erase(0); }) ==
        "kept.json: reports: got an array of 8, expected an array of 9");
  CHECK(derivatives_after([](Json& j) { j["labels"].erase(0); }) ==
        "kept.json: Derivatives: labels: got 3, expected 4, one an element");
  CHECK(derivatives_after([](Json& j) { j["mean"] = 1.0; }) ==
        "kept.json: mean: got 1.0, expected an array of numbers");
}

TEST_CASE("Content that no whet would write is refused by its field") {
  CHECK(information_after([](Json& j) {
          j["root"][3][1] = 1e-300;
        }).find("kept.json: root: RootInformation::from_root: the root: ") == 0);
  CHECK(information_after([](Json& j) { j["root"][1][1] = -1e-300; }).find("diagonal >= 0") !=
        std::string::npos);
  CHECK(information_after([](Json& j) { j["root"][0][1] = "inf"; }).find("of finite numbers") !=
        std::string::npos);
  CHECK(information_after([](Json& j) { j["root"][0][1] = nullptr; }) ==
        R"(kept.json: root[0][1]: got null, expected a number, "inf" or "-inf")");
  CHECK(information_after([](Json& j) { j["errors"]["columns"]["sizes"][1] = -1e-9; }) ==
        "kept.json: errors.columns.sizes[1]: got -1e-09, expected a size >= 0");
  CHECK(information_after([](Json& j) { j["errors"]["matrices"][0]["hidden"][1] = "-inf"; }) ==
        "kept.json: errors.matrices[0].hidden[1]: got \"-inf\", expected a size >= 0");
  CHECK(information_after([](Json& j) { j["absent"][0]["why"] = "lost"; }) ==
        "kept.json: absent[0].why: got \"lost\", expected one of integrated_out, held, replaced");
  CHECK(information_after([](Json& j) { j["absent"][1]["name"] = "rate"; }) ==
        "kept.json: absent[1].name: got \"rate\", expected a name that is neither there twice nor "
        "a parameter");
  CHECK(information_after([](Json& j) {
          j["absent"][1] = j["absent"][0];
        }).find("kept.json: absent[1].name: got \"depth\"") == 0);
  CHECK(information_after([](Json& j) { j["shifts"][1] = "calibration"; }) ==
        "kept.json: shifts[1]: got \"calibration\", expected a name that is not there twice");
  CHECK(information_after([](Json& j) {
          j["experiments"][1] = "Sandpiper";
        }).find("kept.json: experiments[1]: got \"Sandpiper\"") == 0);
  CHECK(information_after([](Json& j) { j["has_prior"] = 1; }) ==
        "kept.json: has_prior: got 1, expected true or false");
  CHECK(information_after([](Json& j) { j["notes"][1] = {"a"}; }) ==
        "kept.json: notes[1]: got an array of 1, expected a string");
  CHECK(derivatives_after([](Json& j) { j["values"][3][2] = "-inf"; }) ==
        "kept.json: Derivatives: values, element 3, parameter \"p2\": got -inf, expected a finite "
        "value");
  CHECK(derivatives_after([](Json& j) { j["noise"][0][0] = -1; }).find("expected a finite size") !=
        std::string::npos);
  CHECK(derivatives_after([](Json& j) { j["signs_known"] = false; }).find("errors, element 0") !=
        std::string::npos);
  CHECK(derivatives_after([](Json& j) {
          j["reports"][5]["status"] = "fine";
        }).find("kept.json: reports[5].status: got \"fine\", expected one of exact, given") == 0);
  CHECK(derivatives_after([](Json& j) { j["reports"][6]["elements"][1] = 4; }) ==
        "kept.json: reports[6].elements[1]: got 4, expected a whole number from 0 to 3");
  CHECK(derivatives_after([](Json& j) { j["rounds"] = 2.0; }).find("rounds: got 2.0, expected") !=
        std::string::npos);
  CHECK(derivatives_after([](Json& j) { j["evaluations"] = -1; }).find("got -1, expected") !=
        std::string::npos);
  CHECK(derivatives_after([](Json& j) {
          j["evaluations"] = 18446744073709551615U;
        }).find("got 18446744073709551615, expected") != std::string::npos);
}

TEST_CASE("What could not be read again is not written, and the old file stays") {
  const TemporaryFolder folder;
  put(folder / "kept.json", "old");
  const auto refused = [&](const std::function<void(Information::Parts&)>& change) {
    Information::Parts parts = sandpiper().parts();
    change(parts);
    try {
      whet::save(Information(parts), folder / "kept.json");
    } catch (const FileError& error) {
      return std::string(error.what());
    }
    return std::string("nothing refused");
  };
  CHECK(refused([](auto& parts) {
          parts.root.add({{Eigen::VectorXd::Constant(1, std::nan("")), Eigen::MatrixXd::Ones(1, 3),
                           Eigen::VectorXd::Zero(1), Eigen::VectorXd::Zero(1)},
                          {}});
        }).find("kept.json: errors.columns.sizes[4]: got null, expected a number") !=
        std::string::npos);
  CHECK(refused([](auto& parts) {
          parts.shifts[1] = parts.shifts[0];
        }).find("kept.json: shifts[1]: got \"calibration\"") != std::string::npos);
  CHECK(refused([](auto& parts) {
          parts.notes[0] = "caf\xe9";
        }).find("kept.json: notes: got incomplete UTF-8 string") != std::string::npos);
  CHECK(text_of(folder / "kept.json") == "old");
  CHECK(folder.size() == 1);
  CHECK_THROWS_WITH_AS(whet::save(plover(), folder / "kept.json/x.json"),
                       doctest::Contains("x.json: writing: got \"Not a directory\""), FileError);
}

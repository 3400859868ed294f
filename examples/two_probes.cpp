// What each probe adds: two invented surveys of one growth history, alone and together, a
// systematic that would spoil one of them, and the picture of README.md.
//
//   two_probes [FILE.svg]

#include <cmath>
#include <cstdio>
#include <fstream>
#include <iostream>
#include <numbers>
#include <string>
#include <vector>

#include <whet/whet.hpp>

namespace {

// Sandpiper sees the amplitude of clustering in shells of redshift, up to a bias of its own.
const auto clustering = [](const auto& at) {
  const std::vector<double> redshifts{0.3, 0.5, 0.7, 0.9, 1.1, 1.3};
  return whet::tabulate(redshifts, [&](double z) {
    using std::pow;
    return at["bias"] * at["amplitude"] * pow(1.0 / (1.0 + z), at["growth"]);
  });
};
// Bittern sees the lensing of what lies behind, free of bias but less sharp.
const auto lensing = [](const auto& at) {
  const std::vector<double> redshifts{0.4, 0.8, 1.2};
  return whet::tabulate(redshifts, [&](double z) {
    using std::pow;
    const auto amplitude = at["amplitude"] * pow(1.0 / (1.0 + z), at["growth"]);
    return amplitude * amplitude * z;
  });
};

/// A frame of 520 x 360 pixels about the fiducial point, with room for labels.
struct Picture {
  double x0{0.8}, y0{0.55}, half_x{0.15}, half_y{0.2};
  std::ofstream out;

  explicit Picture(const char* file) : out(file) {
    out << "<svg xmlns='http://www.w3.org/2000/svg' viewBox='0 0 640 450' font-family='sans-serif' "
           "font-size='15'>\n<title>Growth against amplitude, two probes and both "
           "together</title>\n"
           "<rect width='640' height='450' fill='white'/>\n"
           "<clipPath id='frame'><rect x='80' y='20' width='520' height='360'/></clipPath>\n";
    for (const double x : {0.70, 0.75, 0.80, 0.85, 0.90}) {
      out << "<text text-anchor='middle' x='" << across(x) << "' y='402'>" << x
          << "</text><path d='M" << across(x) << " 380v-6' stroke='black'/>\n";
    }
    for (const double y : {0.4, 0.5, 0.6, 0.7}) {
      out << "<text text-anchor='end' x='72' y='" << up(y) + 5 << "'>" << y
          << "</text><path d='M80 " << up(y) << "h6' stroke='black'/>\n";
    }
    out << "<text text-anchor='middle' x='340' y='430'>amplitude</text>\n"
           "<text text-anchor='middle' transform='translate(28 200) rotate(-90)'>growth</text>\n";
  }
  [[nodiscard]] double across(double x) const { return 340.0 + 260.0 * (x - x0) / half_x; }
  [[nodiscard]] double up(double y) const { return 200.0 - 180.0 * (y - y0) / half_y; }

  /// The regions that hold 68.27 and 95.45 % of the joint probability, and a line of the legend.
  void add(const whet::Forecast& forecast, const std::string& name, int line,
           const std::string& style) {
    for (const double level : {0.9545, 0.6827}) {
      const auto e = forecast.ellipse("amplitude", "growth", whet::Confidence::probability(level));
      const double c = std::cos(e.angle), s = std::sin(e.angle);
      out << "<polygon clip-path='url(#frame)' " << style << " points='";
      for (int i = 0; i < 180; ++i) {
        const double major = e.semi_major * std::cos(std::numbers::pi * i / 90.0);
        const double minor = e.semi_minor * std::sin(std::numbers::pi * i / 90.0);
        out << across(e.centre_x + c * major - s * minor) << ','
            << up(e.centre_y + s * major + c * minor) << ' ';
      }
      out << "'/>\n";
    }
    out << "<rect x='100' y='" << 28 + 24 * line << "' width='26' height='14' " << style
        << "/><text x='136' y='" << 41 + 24 * line << "'>" << name << "</text>\n";
  }
  bool finish() {
    out << "<rect x='80' y='20' width='520' height='360' fill='none' stroke='black'/>\n</svg>\n";
    return out.good();
  }
};

}  // namespace

int main(int argc, char** argv) {
  const whet::Parameters shared{{"amplitude", 0.8}, {"growth", 0.55}};
  const auto sandpiper = whet::expected_information(
      shared.with({"bias", 1.6}),
      whet::GaussianLikelihood(whet::exact(clustering), whet::DiagonalCovariance::uniform(6, 0.02)),
      {.shifts = {{"dust", std::vector<double>{0.0, 0.001, 0.002, 0.004, 0.006, 0.009}}},
       .name = "Sandpiper"});
  const auto bittern = whet::expected_information(
      shared,
      whet::GaussianLikelihood(whet::exact(lensing), whet::DiagonalCovariance::uniform(3, 0.01)),
      {.name = "Bittern"});
  const whet::Forecast first(sandpiper + whet::GaussianPrior("bias", 0.1)), second(bittern),
      both(sandpiper + bittern);

  std::cout << "Sandpiper with a prior of 0.1 on its bias\n" << first << '\n';
  std::cout << "Bittern\n" << second << "\nBoth, no prior\n" << both << '\n';
  std::printf(
      "Dust left out of the fit would shift growth by %.2f sigma in Sandpiper, %.2f in both.\n",
      first.bias("growth", "dust") / first.sigma("growth"),
      both.bias("growth", "dust") / both.sigma("growth"));

  if (argc < 2) return 0;
  Picture picture(argv[1]);
  const std::string paint = "stroke-width='2' fill-opacity='0.2' ";
  picture.add(first, "Sandpiper", 0, paint + "fill='#0072B2' stroke='#0072B2'");
  picture.add(second, "Bittern", 1,
              paint + "fill='#E69F00' stroke='#E69F00' stroke-dasharray='8 4'");
  picture.add(both, "both", 2, paint + "fill='black' stroke='black'");
  return picture.finish() ? 0 : 1;
}

// Folding 10^6 rows of 50 columns into the root of the information: time against Eigen's W^T W and
// NumPy's QR, the memory it takes beyond the rows, and the time of an ill-conditioned stream. One
// thread.

#include <fstream>
#include <string>

#include <Eigen/Core>

#include <whet/information/root_information.hpp>

#include "row.hpp"

namespace {

whet::RootInformation folded(const Eigen::MatrixXd& rows) {
  whet::RootInformation information(rows.cols());
  information.fold(rows);
  return information;
}

/// Powers 0 ... 10 of x from -9 to -3 in order: the condition number of R is 1e10 (as in NIST's
/// Filip), and each chunk extrapolates from those before it.
Eigen::MatrixXd powers(Eigen::Index count) {
  const Eigen::ArrayXd x = Eigen::ArrayXd::LinSpaced(count, -9.0, -3.0);
  Eigen::MatrixXd rows(count, 11);
  rows.col(0).setOnes();
  for (Eigen::Index j = 1; j < 11; ++j) rows.col(j) = rows.col(j - 1).array() * x;
  return rows;
}

/// A line of this process's status, in MiB: VmRSS is its memory now, VmHWM the most it has had.
double memory(const std::string& line) {
  std::ifstream status("/proc/self/status");
  std::string name;
  double kib = 0.0;
  while (status >> name && name != line + ":") status.ignore(1000, '\n');
  status >> kib;
  return kib / 1024.0;
}

}  // namespace

int main() {
  constexpr Eigen::Index columns = 50;
  const Eigen::MatrixXd rows = Eigen::MatrixXd::Random(1'000'000, columns);

  const auto fold = [&rows] { whet::benchmark::keep(folded(rows)); };
  const auto square = [&rows] {
    Eigen::MatrixXd fisher = Eigen::MatrixXd::Zero(columns, columns);
    fisher.selfadjointView<Eigen::Lower>().rankUpdate(rows.transpose());
    whet::benchmark::keep(fisher);
  };

  const double before = memory("VmRSS");
  fold();
  const double beyond = memory("VmHWM") - before;

  const auto best = whet::benchmark::best_of(15, fold, square);
  whet::benchmark::row("fold: 10^6 x 50 / Eigen's W^T W", best.ours, best.peer, 2.0);
  whet::benchmark::row("fold: 10^6 x 50", best.ours, whet::benchmark::python_peer("numpy_qr.py"),
                       1.0 / 8.0, "NumPy on OpenBLAS", "s");
  whet::benchmark::row("fold: peak memory beyond the rows / what is allowed", beyond, 2.0, 1.0,
                       "MiB");

  const Eigen::MatrixXd ill = powers(1'000'000), well = Eigen::MatrixXd::Random(1'000'000, 11);
  const auto conditions = whet::benchmark::best_of(
      40, [&ill] { whet::benchmark::keep(folded(ill)); },
      [&well] { whet::benchmark::keep(folded(well)); });
  whet::benchmark::row("fold: 10^6 x 11, ill-conditioned / well-conditioned", conditions.ours,
                       conditions.peer, 1.5);
}

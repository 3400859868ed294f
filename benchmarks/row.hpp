#pragma once
/// Rows of `cmake -P cmake/measure.cmake`: what was measured, ours, the peer's in the same run, the
/// ratio, the bar, met or not. The build hands over WHET_PEERS_DIR, the folder of the peers'
/// scripts.

#include <algorithm>
#include <chrono>
#include <cstdio>
#include <limits>
#include <optional>
#include <string>

namespace whet::benchmark {

/// What a peer measured of itself, in the unit of the row, and what it is ("NumPy 1.24, OpenBLAS").
struct Peer {
  double figure = 0.0;
  std::string name;
};

/// Least seconds of two competitors that ran in turn.
struct Seconds {
  double ours = std::numeric_limits<double>::infinity();
  double peer = std::numeric_limits<double>::infinity();
};

/// Wall-clock seconds of one call.
template <typename Function>
[[nodiscard]] double seconds_of(Function&& function) {
  const auto start = std::chrono::steady_clock::now();
  function();
  return std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count();
}

/// Run both `repetitions` times, in turn so that a busy spell of the machine meets both, and keep
/// the least time of each.
template <typename Ours, typename Theirs>
[[nodiscard]] Seconds best_of(int repetitions, Ours&& ours, Theirs&& peer) {
  Seconds best;
  for (int i = 0; i < repetitions; ++i) {
    best.ours = std::min(best.ours, seconds_of(ours));
    best.peer = std::min(best.peer, seconds_of(peer));
  }
  return best;
}

/// Use a result in a way the optimiser cannot see through, so that its computation stays.
template <typename T>
void keep(const T& value) {
  asm volatile("" : : "r"(&value) : "memory");
}

/// Run a command and read its one line: a figure, then the peer's name.
/// @return nothing where the command fails or prints something else (the peer is not installed)
[[nodiscard]] inline std::optional<Peer> peer_from(const std::string& command) {
  std::FILE* pipe = popen((command + " 2>/dev/null").c_str(), "r");
  if (pipe == nullptr) return std::nullopt;
  std::string line;
  for (int c = std::fgetc(pipe); c != EOF; c = std::fgetc(pipe)) line += static_cast<char>(c);
  const bool ended_well = pclose(pipe) == 0;
  Peer peer;
  char name[128] = "";
  if (!ended_well || std::sscanf(line.c_str(), "%lf %127[^\n]", &peer.figure, name) < 1) {
    return std::nullopt;
  }
  peer.name = name;
  return peer;
}

/// Run benchmarks/peers/`script` in Python on one thread: the first python3 of the path, else the
/// system's, which has the system's NumPy. The two variables that some machines set to pin OpenBLAS
/// to the kernel of an older processor are unset: the peer runs at its best.
[[nodiscard]] inline std::optional<Peer> python_peer(const std::string& script) {
  for (const std::string python : {"python3", "/usr/bin/python3"}) {
    const auto peer =
        peer_from("env -u OPENBLAS_CORETYPE -u OPENBLAS_L2_SIZE OPENBLAS_NUM_THREADS=1 " + python +
                  " '" WHET_PEERS_DIR "/" + script + "'");
    if (peer) return peer;
  }
  return std::nullopt;
}

namespace detail {

inline void print(const std::string& what, const std::string& ours, const std::string& peer,
                  const std::string& ratio, const std::string& bar, const std::string& verdict) {
  std::printf("%-58s %12s %12s %8s %8s  %s\n", what.c_str(), ours.c_str(), peer.c_str(),
              ratio.c_str(), bar.c_str(), verdict.c_str());
  std::fflush(stdout);
}

[[nodiscard]] inline std::string number(const char* format, double value) {
  char text[64];
  std::snprintf(text, sizeof text, format, value);
  return text;
}

}  // namespace detail

/// Print the row of a measurement: met where ours / peer <= bar.
/// @param what  what was measured and who the peer is, about 58 characters
/// @param unit  of both figures: "s", "calls"
inline void row(const std::string& what, double ours, double peer, double bar,
                const std::string& unit = "s") {
  const double ratio = ours / peer;
  detail::print(what, detail::number("%.4g ", ours) + unit, detail::number("%.4g ", peer) + unit,
                detail::number("%.3g", ratio), "<= " + detail::number("%.3g", bar),
                ratio <= bar ? "met" : "NOT MET");
}

/// Print the row of a figure without a peer: met where it is at least the bar.
inline void row_at_least(const std::string& what, double ours, double bar,
                         const std::string& unit) {
  detail::print(what, detail::number("%.4g ", ours) + unit, "-", "-",
                ">= " + detail::number("%.3g", bar), ours >= bar ? "met" : "NOT MET");
}

/// Print the row of a peer that is not there: visible, and neither met nor failed.
inline void skipped_row(const std::string& what, const std::string& missing) {
  detail::print(what, "-", "-", "-", "-", "skipped: no " + missing);
}

/// The row of a peer that may be missing.
inline void row(const std::string& what, double ours, const std::optional<Peer>& peer, double bar,
                const std::string& missing, const std::string& unit) {
  if (!peer) return skipped_row(what, missing);
  row(what + " / " + peer->name, ours, peer->figure, bar, unit);
}

}  // namespace whet::benchmark

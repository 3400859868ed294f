#pragma once
/// What examples/repeat_measurement.cpp is asked for on its command line.

#include <stdexcept>
#include <string>
#include <vector>

namespace nist {

inline constexpr const char* usage =
    "usage: repeat_measurement [SET] [--coefficient NAME] [--numerical] | --list | --help\n"
    "  SET                 one of the NIST Statistical Reference Datasets; Thurber if not given\n"
    "  --coefficient NAME  the one to plan for; else the one with the largest relative sigma\n"
    "  --numerical         call the model in double only, instead of exact derivatives\n"
    "  --list              what sets there are\n";

struct Command {
  std::string set{"Thurber"};
  std::string coefficient{};  ///< empty: the program chooses
  bool numerical{false};
  bool list{false};
  bool help{false};
};

/// @param words  the arguments, without the name of the program
/// @throws std::invalid_argument that holds the usage, on what is not understood
[[nodiscard]] inline Command parse(const std::vector<std::string>& words) {
  Command command;
  bool named = false;
  for (std::size_t i = 0; i < words.size(); ++i) {
    if (words[i] == "--help") {
      command.help = true;
    } else if (words[i] == "--list") {
      command.list = true;
    } else if (words[i] == "--numerical") {
      command.numerical = true;
    } else if (words[i] == "--coefficient" && i + 1 < words.size()) {
      command.coefficient = words[++i];
    } else if (!words[i].starts_with('-') && !named) {
      command.set = words[i];
      named = true;
    } else {
      throw std::invalid_argument("not understood: " + words[i] + "\n" + usage);
    }
  }
  return command;
}

}  // namespace nist

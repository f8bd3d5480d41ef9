#pragma once

#include <string>
#include <utility>
#include <vector>

#include "stillmass/base/finding.hpp"
#include "stillmass/recording/recording.hpp"

namespace stillmass::report {

/// What the results of all commands have in common.
struct Envelope {
  std::string command;
  std::vector<std::pair<std::string, std::string>> settings;  ///< options as given
  std::vector<recording::Recording> inputs;
  std::vector<std::string> hashes;  ///< SHA-256 of each input, or empty
  std::vector<base::Finding> warnings;
};

}  // namespace stillmass::report

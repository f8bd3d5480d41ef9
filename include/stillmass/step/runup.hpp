#pragma once

#include <optional>
#include <string>
#include <vector>

#include "stillmass/base/context.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/modal/mode.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/rotation/runup.hpp"
#include "stillmass/step/part.hpp"

namespace stillmass::step {

struct RunupRequest {
  Part part;
  std::string speed_channel;  ///< name; empty: the first channel with role tacho
  int pulses_per_turn = 1;
  bool falling_edge = false;
  std::vector<double> orders = {1.0, 2.0, 3.0};
  std::optional<double> max_frequency_hz;
  std::vector<modal::Mode> modes;  ///< known natural frequencies (from a hammer test)
};

/// A speed at which an order shows a peak, or at which it meets a known mode. Speeds in turns per second.
struct CriticalSpeedFound {
  base::Estimate speed;  ///< natural frequency over order; of a fast sweep with the lag in its u
  std::optional<double>
      peak_speed_hz;  ///< where the response was highest; absent: a known mode without a peak of its own
  double order = 1.0;
  std::string channel;
  std::optional<double> amplification_factor;  ///< of a known mode 1 / (2 zeta); absent: the flanks are not in the
                                               ///< data, or the sweep was too fast to read it
  std::optional<modal::Mode> mode;             ///< absent as above, or the known mode that it meets
};

struct RunupResult {
  recording::Recording recording;
  std::optional<rotation::Runup> runup;      ///< absent: see the refusal
  std::vector<rotation::OrderTrack> tracks;  ///< in velocity where the channel allows it
  std::vector<CriticalSpeedFound> critical_speeds;
  std::optional<base::Refusal> refusal;
  std::vector<base::Finding> findings;
};

/// Speed, order tracks, waterfall and critical speeds of one recording with a tacho. Throws what the reader throws,
/// `Stopped`, and `Error` (usage) for a channel that is not there.
RunupResult runup(const recording::Reader& reader, const RunupRequest& request, const base::Context& context);

}  // namespace stillmass::step

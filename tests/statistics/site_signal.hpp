#pragma once

#include <cstdint>
#include <string>
#include <vector>

#include "support/memory_reader.hpp"

namespace stillmass::tests {

/// An acceleration signal as a sound chain would bring it home from some machine, everything about it drawn from a
/// seed: rate, length, speed, harmonics, vane pass, twice the supply's frequency, resonances fed by noise, broad-band
/// noise, the sensor's low corner, an anti-alias filter. Apart from the program's own simulation of a skid.
struct SiteSignal {
  enum class Kind { steady, runup, blows };
  Kind kind = Kind::steady;
  double rate_hz = 0.0;
  std::vector<double> samples;  ///< m/s2, not yet stored in steps
  double range = 0.0;           ///< of the recorder, m/s2
  int bits = 24;

  double rms() const;
  double peak() const;
};

SiteSignal site_signal(std::uint64_t seed);
/// Of a machine running steadily.
SiteSignal steady_signal(std::uint64_t seed);

/// The channel that the recorder stores: noise of the converter (-100 dB of the range), cut off at the range, in steps.
MemoryChannel stored(const SiteSignal& signal, const std::string& name, std::uint64_t seed);

/// White normal noise of unit variance.
std::vector<double> normal_noise(std::size_t count, std::uint64_t seed);

/// The same through an anti-alias filter at 0.39 of the rate (four Butterworth sections).
std::vector<double> filtered_noise(std::size_t count, std::uint64_t seed);

}  // namespace stillmass::tests

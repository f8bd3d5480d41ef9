#pragma once

#include <complex>
#include <cstddef>
#include <optional>
#include <span>
#include <vector>

#include "stillmass/base/context.hpp"
#include "stillmass/modal/hits.hpp"

namespace stillmass::modal {

/// The length that all blocks are cut to, and the exponential window exp(-decay t) that goes over force and response.
struct BlockWindow {
  std::size_t frames = 0;
  double decay_per_s = 0.0;  ///< 0: the responses die away by themselves
};

/// No exponential window where the slowest of the responses has fallen to 1 % or into the noise at the block's end;
/// else as much as takes the rest down to 0.3 %.
BlockWindow choose_window(std::span<const HitBlocks> hits);

/// The spectra of all hits on lines a quarter of the resolution apart (blocks padded with zeros to four times their
/// length); every fourth line is independent of the others.
struct HitSpectra {
  static constexpr std::size_t padding = 4;
  double line_hz = 0.0;
  double resolution_hz = 0.0;
  double decay_per_s = 0.0;
  std::vector<std::vector<std::complex<double>>> force;                   ///< [hit][line], N s
  std::vector<std::vector<std::vector<std::complex<double>>>> responses;  ///< [response][hit][line], (m/s2) s
  std::vector<double> quiet;  ///< [response]: mean square of a line of what is there before the blow, (m/s)^2

  std::size_t lines() const { return force.empty() ? 0 : force.front().size(); }
  std::size_t hits() const { return force.size(); }
  std::complex<double> s(std::size_t line) const;  ///< 1 / tau + i w
};

/// Velocities and displacements become accelerations by s and s^2. Lines up to rate / 2.56.
HitSpectra hit_spectra(std::span<const HitBlocks> hits, const BlockWindow& window,
                       std::span<const ResponseName> responses, const base::Context& context);

/// H1 over the hits, all or all but one.
struct Average {
  std::vector<std::complex<double>> accelerance;
  std::vector<double> coherence;  ///< empty for a single hit
  std::vector<double> u;          ///< of the real part, from the scatter over hits smoothed over neighbouring lines
};
Average average(const HitSpectra& spectra, std::size_t response);
std::vector<std::complex<double>> accelerance_without(const HitSpectra& spectra, std::size_t response,
                                                      std::optional<std::size_t> hit);

/// Mean magnitude of the force over hits, N s.
std::vector<double> force_magnitude(const HitSpectra& spectra);

}  // namespace stillmass::modal

#pragma once

#include <cstdint>
#include <memory>
#include <vector>

#include "stillmass/recording/reader.hpp"

#include "oracle/one_degree.hpp"

namespace stillmass::tests {

/// A recording in memory.
std::unique_ptr<recording::Reader> memory_reader(recording::Recording recording,
                                                 std::vector<std::vector<double>> channels);

/// An impact test as a recorder would store it: force, then one acceleration a point, sums of closed forms with noise.
struct HammerSimulation {
  std::vector<oracle::OneDegree> modes{
      {24.2, 0.010, 210.0}, {31.5, 0.018, 340.0}, {58.0, 0.012, 150.0}, {91.0, 0.015, 120.0}};
  std::vector<std::vector<double>> shapes{{1.0, 1.0, 1.0, 1.0}};  ///< [point][mode], relative to the blow's point
  std::vector<oracle::HalfSine> blows;
  double rate_hz = 2048.0;
  double duration_s = 60.0;
  double force_noise = 0.3;           ///< N
  double response_noise = 0.004;      ///< m/s2
  double force_full_scale = 2000.0;   ///< N; cut off there
  double response_full_scale = 98.0;  ///< m/s2
  double response_offset = 0.0;       ///< m/s2
  std::uint64_t seed = 1;

  std::unique_ptr<recording::Reader> reader() const;
};

/// A blow with a peak that differs a little from hit to hit, every `spacing_s`.
std::vector<oracle::HalfSine> regular_blows(std::size_t count, double spacing_s, std::uint64_t seed = 1);

}  // namespace stillmass::tests

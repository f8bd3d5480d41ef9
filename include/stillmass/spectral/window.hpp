#pragma once

#include <cstddef>
#include <optional>
#include <span>
#include <string_view>
#include <vector>

namespace stillmass::spectral {

enum class Window { rectangle, hann, hamming, blackman_harris, flat_top };
std::string_view name(Window window);
std::optional<Window> window_named(std::string_view name);

/// The periodic (DFT-even) window of n samples, unscaled (coefficients sum as published). Sources in window.cpp.
std::vector<double> samples(Window window, std::size_t n);

/// What a window does to a line, of the continuous window (n large).
struct WindowFacts {
  double noise_bandwidth_bins = 1.0;  ///< equivalent noise bandwidth
  double width_3db_bins = 0.0;        ///< at 3.0000 dB
  double scallop_loss_db = 0.0;       ///< greatest loss of a tone between two lines (positive number)
  double side_lobe_db = 0.0;          ///< highest side lobe (negative number)
};
WindowFacts facts(Window window);

/// Half the width of the main lobe, from its top to its first zero, in bins: tones closer than this are one peak.
double lobe_bins(Window window);

/// Equivalent noise bandwidth of these weights in bins: n sum(w^2) / sum(w)^2. Not for weights that sum to 0.
double noise_bandwidth_bins(std::span<const double> weights);

/// Correlation of the noise in two blocks that start `lag` frames apart: sum(w[i] w[i + lag]) / sum(w^2), 0 from
/// lag = n on. Source: Harris, Proc. IEEE 66 (1978), eq. 18.
double overlap_correlation(std::span<const double> weights, std::size_t lag);

/// Relative bias (negative) of the peak of a resonance of half-power bandwidth B when it is measured with lines
/// `line_hz` apart: of the peak of its density, and equally of the peak of |H1| under white excitation. With
/// s = pi B and the window's own correlation r(t) it is s * integral of exp(-s t) r(t) dt - 1, over the block.
/// Below about 2 % for Hann where B is 8 lines wide or more.
double peak_bias(Window window, double line_hz, double bandwidth_hz);

}  // namespace stillmass::spectral

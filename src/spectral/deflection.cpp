#include "stillmass/spectral/deflection.hpp"

#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/random_error.hpp"

namespace stillmass::spectral {

namespace {

Deflection deflection(const CrossSpectrum& s, double frequency_hz) {
  const auto middle = static_cast<std::size_t>(std::lround(frequency_hz / s.line_hz));
  const auto reach = static_cast<std::size_t>(lobe_bins(s.window)) - 1;
  const std::size_t from = std::max<std::size_t>(middle - std::min(middle, reach), 1);
  const std::size_t to = std::min(middle + reach, s.cross.size() - 1);
  double gxx = 0.0;
  double gyy = 0.0;
  std::complex<double> gxy;
  for (std::size_t k = from; k <= to; ++k) {
    gxx += s.reference_density[k];
    gyy += s.output_density[k];
    gxy += s.cross[k];
  }

  Deflection d;
  d.channel = s.output;
  if (gxx > 0.0) d.ratio = gxy / gxx;
  d.magnitude = {std::abs(d.ratio), std::nullopt, std::nullopt, base::Quantity::ratio};
  d.phase = {std::arg(d.ratio), std::nullopt, std::nullopt, base::Quantity::angle};
  if (s.blocks < 2) return d;
  d.coherence = gxx > 0.0 && gyy > 0.0 ? std::min(std::norm(gxy) / gxx / gyy, 1.0) : 0.0;
  const double error = response_error(*d.coherence, s.effective_averages);
  if (!std::isfinite(error)) return d;
  const double dof = std::max(2.0 * (s.effective_averages - 1.0), 1.0);
  d.magnitude.u = error * d.magnitude.value;
  d.magnitude.dof = dof;
  d.phase.u = error;
  d.phase.dof = dof;
  return d;
}

}  // namespace

std::vector<Deflection> deflections(std::span<const CrossSpectrum> spectra, double frequency_hz) {
  std::vector<Deflection> all;
  for (const CrossSpectrum& s : spectra) {
    if (s.blocks == 0) continue;
    if (!(frequency_hz >= s.line_hz && frequency_hz <= 0.5 * s.rate_hz)) {
      throw base::usage_error({}, fmt::format("deflections at {} Hz", frequency_hz),
                              fmt::format("the spectra reach from {:.6g} to {:.6g} Hz", s.line_hz, 0.5 * s.rate_hz));
    }
    all.push_back(deflection(s, frequency_hz));
  }
  return all;
}

}  // namespace stillmass::spectral

#include "stillmass/modal/peaks.hpp"

#include <algorithm>
#include <cmath>
#include <cstddef>

namespace stillmass::modal {
namespace {

constexpr double least_rise = 4.0 / 3.0;     // peak over valley
constexpr double least_significance = 10.0;  // peak less valley, in standard uncertainties
constexpr double least_coherence = 0.8;
constexpr double least_of_highest = 0.01;

struct Peak {
  std::size_t line;
  std::size_t left;  ///< bottom of the valley on either side, within the band
  std::size_t right;
  double rise;
};

/// The lowest line between the peak and the first line higher than it, going in one direction.
std::size_t valley(const std::vector<double>& y, std::size_t peak, std::ptrdiff_t direction, std::ptrdiff_t end) {
  std::size_t lowest = peak;
  for (auto k = static_cast<std::ptrdiff_t>(peak); k != end && y[static_cast<std::size_t>(k)] <= y[peak];
       k += direction) {
    if (y[static_cast<std::size_t>(k)] < y[lowest]) lowest = static_cast<std::size_t>(k);
  }
  return lowest;
}

/// Distance from the peak to half its height on one side, in lines; to the valley where that is not reached.
double half_width(const std::vector<double>& y, std::size_t peak, std::size_t bottom) {
  const double half = 0.5 * y[peak];
  const std::ptrdiff_t step = bottom < peak ? -1 : 1;
  for (auto k = static_cast<std::ptrdiff_t>(peak); k != static_cast<std::ptrdiff_t>(bottom); k += step) {
    const double here = y[static_cast<std::size_t>(k)];
    const double next = y[static_cast<std::size_t>(k + step)];
    if (next < half) {
      return std::abs(static_cast<double>(k - static_cast<std::ptrdiff_t>(peak))) + (here - half) / (here - next);
    }
  }
  return std::abs(static_cast<double>(bottom) - static_cast<double>(peak));
}

bool coherent(const PeakLines& lines, std::size_t peak, double width) {
  if (lines.coherence.empty()) return true;
  const auto reach = static_cast<std::size_t>(std::max(1.0, width));
  const std::size_t first = peak > reach ? peak - reach : 0;
  const std::size_t last = std::min(peak + reach, lines.coherence.size() - 1);
  double sum = 0.0;
  for (std::size_t k = first; k <= last; ++k) sum += lines.coherence[k];
  return sum >= least_coherence * static_cast<double>(last - first + 1);
}

}  // namespace

std::vector<FrequencyAndDamping> find_modes(const PeakLines& lines, base::Interval band_hz, std::size_t most) {
  const std::vector<double>& y = lines.indicator;
  if (y.size() < 3) return {};
  const auto first = static_cast<std::size_t>(std::max(1.0, std::ceil(band_hz.lo / lines.line_hz)));
  const auto last = std::min(y.size() - 2, static_cast<std::size_t>(std::max(0.0, band_hz.hi / lines.line_hz)));
  if (last < first + 2) return {};
  const double highest = *std::max_element(y.begin() + static_cast<std::ptrdiff_t>(first),
                                           y.begin() + static_cast<std::ptrdiff_t>(last) + 1);

  std::vector<Peak> peaks;
  for (std::size_t k = first + 1; k < last; ++k) {
    if (y[k] < y[k - 1] || y[k] <= y[k + 1] || y[k] < least_of_highest * highest) continue;
    const std::size_t left = valley(y, k, -1, static_cast<std::ptrdiff_t>(first) - 1);
    const std::size_t right = valley(y, k, 1, static_cast<std::ptrdiff_t>(last) + 1);
    const double saddle = std::max(y[left], y[right]);
    const double width = std::min(half_width(y, k, left), half_width(y, k, right));
    if (y[k] < least_rise * saddle || y[k] - saddle < least_significance * lines.u[k]) continue;
    if (coherent(lines, k, width)) peaks.push_back({k, left, right, y[k] / saddle});
  }
  std::ranges::sort(peaks, std::greater{}, &Peak::rise);
  if (peaks.size() > most) peaks.resize(most);
  std::ranges::sort(peaks, {}, &Peak::line);

  std::vector<FrequencyAndDamping> modes;
  for (const Peak& peak : peaks) {
    // The imaginary part falls to a half at z fn beside the peak.
    const double width = std::min(half_width(y, peak.line, peak.left), half_width(y, peak.line, peak.right));
    const double f = static_cast<double>(peak.line) * lines.line_hz;
    modes.push_back({f, std::clamp(width / static_cast<double>(peak.line), 1e-4, 0.2)});
  }
  return modes;
}

}  // namespace stillmass::modal

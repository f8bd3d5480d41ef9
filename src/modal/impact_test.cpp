#include "stillmass/modal/impact_test.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"

#include "modal/hit_spectra.hpp"
#include "modal/impact_modes.hpp"
#include "modal/mode_search.hpp"

namespace stillmass::modal {
namespace {

constexpr double force_fall = 0.1;  // -20 dB: common practice
constexpr double least_lines_above_zero = 3.0;

void check(std::span<const HitBlocks> hits) {
  for (const HitBlocks& hit : hits) {
    const bool fits = hit.rate_hz == hits.front().rate_hz && !hit.responses.empty() && !hit.force.empty() &&
                      hit.responses.size() == hits.front().responses.size() && hit.force.size() > hit.contact_end &&
                      std::ranges::all_of(hit.responses, [&](const auto& r) { return r.size() == hit.force.size(); });
    if (!fits)
      throw base::Error(base::ErrorKind::internal, "modal/impact_test", "the blocks of the hits do not fit together");
  }
}

std::optional<std::size_t> driving_point(const ImpactTestOptions& options, std::size_t responses) {
  const std::string& wanted = options.driving_point.empty() ? options.force_point : options.driving_point;
  for (std::size_t p = 0; p < options.responses.size() && !wanted.empty(); ++p) {
    if (options.responses[p].point == wanted || options.responses[p].channel == wanted) return p;
  }
  if (!options.driving_point.empty()) {
    throw base::usage_error("--driving-point", "no response is named '" + options.driving_point + "'");
  }
  const bool alone = responses == 1;
  const bool elsewhere = alone && !wanted.empty() && !options.responses.empty() && !options.responses[0].point.empty();
  return alone && !elsewhere ? std::optional<std::size_t>(0) : std::nullopt;
}

base::Interval band_of(const ImpactTestOptions& options, const HitSpectra& spectra, std::span<const double> force) {
  const double highest_line = spectra.line_hz * static_cast<double>(spectra.lines() - 1);
  const double highest_force = *std::ranges::max_element(force);
  std::size_t usable = 1;
  while (usable + 1 < force.size() && force[usable] >= force_fall * highest_force) ++usable;
  base::Interval band{least_lines_above_zero * spectra.resolution_hz, spectra.line_hz * static_cast<double>(usable)};
  if (options.band_hz) band = *options.band_hz;
  if (options.max_frequency_hz) band.hi = std::min(options.band_hz ? band.hi : highest_line, *options.max_frequency_hz);
  band.hi = std::min(band.hi, highest_line);
  if (!(band.lo < band.hi)) throw base::usage_error("--band", "holds no line of the spectrum", "widen it");
  return band;
}

/// Far below the first and above the last mode there is nothing to fit but faults of the sensors.
base::Interval fit_band(base::Interval band, std::span<const FrequencyAndDamping> start, bool given) {
  if (given) return band;
  return {std::max(band.lo, 0.5 * start.front().frequency_hz), std::min(band.hi, 1.5 * start.back().frequency_hz)};
}

std::vector<FrequencyAndDamping> start_values(std::vector<FrequencyAndDamping> modes, double decay_per_s) {
  for (FrequencyAndDamping& mode : modes) {
    mode.damping_ratio = std::max(1e-4, without_window(mode.damping_ratio, mode.frequency_hz, decay_per_s));
  }
  return modes;
}

void add_finding(ImpactTest& test, base::Code code, base::Strength strength, std::string text) {
  test.findings.push_back({code, std::move(text), {}, {}, {}, strength, {}});
}

void report_incoherent_peaks(const PeakLines& lines, base::Interval band, std::span<const FrequencyAndDamping> taken,
                             ImpactTest& test) {
  PeakLines all = lines;
  all.coherence.clear();
  for (const FrequencyAndDamping& peak : find_modes(all, band)) {
    const bool known = std::ranges::any_of(
        taken, [&](const FrequencyAndDamping& mode) { return mode.frequency_hz == peak.frequency_hz; });
    if (known) continue;
    add_finding(test, base::Code::low_coherence, base::Strength::fair,
                "the peak at " + base::rounded(peak.frequency_hz, 4) +
                    " Hz was not taken for a mode: the coherence there is below 0.8");
  }
}

void report_close_modes(ImpactTest& test) {
  for (std::size_t r = 1; r < test.modes.size(); ++r) {
    const Mode& low = test.modes[r - 1];
    const Mode& high = test.modes[r];
    const double apart = high.frequency.value - low.frequency.value;
    const double half_widths =
        low.damping_ratio.value * low.frequency.value + high.damping_ratio.value * high.frequency.value;
    if (apart > half_widths) continue;
    add_finding(test, base::Code::close_modes, base::Strength::strong,
                "the modes at " + base::rounded(low.frequency.value, 4) + " and " +
                    base::rounded(high.frequency.value, 4) + " Hz lie within one half-power bandwidth");
  }
}

AveragedResponse pictured(const ImpactTestOptions& options, std::size_t p, Average average) {
  AveragedResponse response;
  if (p < options.responses.size()) {
    response.channel = options.responses[p].channel;
    response.point = options.responses[p].point;
  }
  response.accelerance = std::move(average.accelerance);
  response.coherence = std::move(average.coherence);
  response.u = std::move(average.u);
  response.fitted.assign(response.accelerance.size(), 0.0);
  return response;
}

}  // namespace

ImpactTestOptions options_for(const HitSearch& search) {
  ImpactTestOptions options;
  options.responses = search.responses;
  options.force_point = search.force_point;
  options.force_factor_u = search.force_factor_u;
  return options;
}

base::Answer<ImpactTest> impact_test(std::span<const HitBlocks> hits, const ImpactTestOptions& options,
                                     const base::Context& context) {
  if (hits.empty()) {
    return base::Refusal{
        "no-usable-hit", "none of the blows could be used",
        "strike again, five single clean blows, each after the vibration of the last has died away, with "
        "the ranges of force and acceleration set so that nothing is cut off"};
  }
  check(hits);
  ImpactTest test;
  test.hits = hits.size();
  test.driving_point = driving_point(options, hits.front().responses.size());

  const BlockWindow window = choose_window(hits);
  const HitSpectra spectra = hit_spectra(hits, window, options.responses, context);
  test.line_hz = spectra.line_hz;
  test.resolution_hz = spectra.resolution_hz;
  test.decay_per_s = spectra.decay_per_s;
  test.force_spectrum = force_magnitude(spectra);
  test.band_hz = band_of(options, spectra, test.force_spectrum);

  // The driving point comes first in the fit.
  std::vector<std::size_t> order(spectra.responses.size());
  std::iota(order.begin(), order.end(), 0U);
  if (test.driving_point) std::swap(order.front(), order[*test.driving_point]);
  std::vector<Average> averages;
  for (const std::size_t p : order) averages.push_back(average(spectra, p));

  const PeakLines lines = peak_lines(spectra, averages);
  const std::vector<FrequencyAndDamping> peaks = find_modes(lines, test.band_hz);
  if (!averages.front().coherence.empty()) report_incoherent_peaks(lines, test.band_hz, peaks, test);
  if (peaks.empty()) {
    return base::Refusal{"no-mode",
                         "between " + base::rounded(test.band_hz.lo) + " and " + base::rounded(test.band_hz.hi) +
                             " Hz no resonance stands out of the scatter between the blows",
                         "strike harder, with more blows and a softer tip, at a point that moves more"};
  }
  const base::Interval band = fit_band(test.band_hz, peaks, options.band_hz.has_value());
  const FitLines fitted = fit_lines(spectra, averages, band);
  base::Answer<CurveFit> fit =
      search_modes(fitted, start_values(peaks, spectra.decay_per_s), band, test.driving_point.has_value());
  if (!fit) return fit.refusal();
  test.fit = std::move(*fit);

  test.modes = modes_with_uncertainty({spectra, averages, order, fitted, test.fit}, options, test, context);
  report_close_modes(test);
  if (spectra.decay_per_s > 0.0) {
    add_finding(test, base::Code::short_decay, base::Strength::weak,
                "the response had not died away within " + base::rounded(1.0 / spectra.resolution_hz) +
                    " s; an exponential window of " + base::rounded(1.0 / spectra.decay_per_s) +
                    " s was put on and its damping taken off");
  }

  test.responses.resize(order.size());
  for (std::size_t i = 0; i < order.size(); ++i) {
    AveragedResponse response = pictured(options, order[i], std::move(averages[i]));
    for (std::size_t k = 0; k < response.fitted.size(); ++k) {
      if (band.contains(spectra.line_hz * static_cast<double>(k)))
        response.fitted[k] = test.fit.accelerance(i, spectra.s(k));
    }
    test.responses[order[i]] = std::move(response);
  }
  return test;
}

}  // namespace stillmass::modal

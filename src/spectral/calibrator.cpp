#include "stillmass/spectral/calibrator.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <complex>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"
#include "stillmass/numeric/statistics.hpp"
#include "stillmass/spectral/spectrum.hpp"
#include "stillmass/spectral/tone.hpp"

namespace stillmass::spectral {
namespace {

// Common practice, all of them.
constexpr double as_stated = 0.1;             // a sensor in order is nearer to its certificate than that
constexpr double recognised = 0.1;            // so far the sensor itself may be off beside a well-known factor
constexpr double frequency_tolerance = 0.03;  // of a calibrator's frequency
constexpr double dead_level = 0.01;           // of the level expected
constexpr double unsteady = 0.05;             // scatter of the level from block to block
constexpr double level_within = 0.05;         // of |H| about its median
constexpr double level_share = 0.7;           // of the lines of the band that are level and coherent
constexpr double coherent = 0.95;
constexpr double reached_db = 20.0;  // force spectrum below its maximum
constexpr std::size_t least_lines = 10;

struct KnownFactor {
  double value;
  const char* text;
};
constexpr std::array known_factors = {
    KnownFactor{base::standard_gravity,
                "9.81 times too much: a value in m/s2 was taken as one in g, or the recorder's range is a tenth of "
                "that stated"},
    KnownFactor{1.0 / base::standard_gravity,
                "9.81 times too little: a value in g was taken as one in m/s2, or the recorder's range is ten times "
                "that stated"},
    KnownFactor{std::numbers::sqrt2, "1.41 times too much: a peak value was taken for r.m.s."},
    KnownFactor{1.0 / std::numbers::sqrt2, "1.41 times too little: an r.m.s. value was taken for a peak"},
    KnownFactor{2.0 * std::numbers::sqrt2, "2.83 times too much: a peak-to-peak value was taken for r.m.s."},
    KnownFactor{0.5 / std::numbers::sqrt2, "2.83 times too little: an r.m.s. value was taken for peak-to-peak"},
    KnownFactor{25.4, "25.4 times too much: inches and millimetres were mixed up"},
    KnownFactor{1.0 / 25.4, "25.4 times too little: inches and millimetres were mixed up"},
    KnownFactor{1000.0, "1000 times too much: a prefix (milli) was left out"},
    KnownFactor{0.001, "1000 times too little: a prefix (milli) was left out"},
};

// 0 displacement, 1 velocity, 2 acceleration; nothing for what is no motion.
std::optional<int> motion_rank(base::Quantity quantity) {
  if (quantity == base::Quantity::displacement) return 0;
  if (quantity == base::Quantity::velocity) return 1;
  if (quantity == base::Quantity::acceleration) return 2;
  return std::nullopt;
}

// How often the channel's quantity is the derivative of the calibrator's; 0 where one of them is no motion.
int integrals_between(base::Quantity of_calibrator, base::Quantity of_channel) {
  const auto from = motion_rank(of_calibrator);
  const auto to = motion_rank(of_channel);
  return from && to ? *to - *from : 0;
}

base::Refusal no_tone(std::string seen) {
  return {
      "no-calibrator-tone", std::move(seen),
      "see that the sensor is seated and its supply is on, or give the calibrator's frequency and level, and record "
      "20 s of it"};
}

double mean_over(const FrequencyResponse& response, std::span<const std::size_t> lines) {
  double sum = 0.0;
  for (const std::size_t k : lines) sum += std::abs(response.h1[k]);
  return sum / static_cast<double>(lines.size());
}

// Mean force spectrum over the hits in dB below its maximum.
std::vector<double> force_level_db(std::span<const HitBlock> hits, double rate_hz, std::size_t lines, double line_hz) {
  std::vector<double> power(lines, 0.0);
  for (const HitBlock& hit : hits) {
    const Spectrum one =
        averaged_spectrum(hit.force, rate_hz, base::Quantity::force,
                          {.window = Window::rectangle, .overlap = 0.0, .block_frames = hit.force.size()});
    for (std::size_t k = 0; k < lines; ++k) {
      const auto same = static_cast<std::size_t>(std::lround(static_cast<double>(k) * line_hz / one.line_hz));
      if (same < one.density.size()) power[k] += one.density[same];
    }
  }
  const double most = *std::max_element(power.begin() + 1, power.end());
  for (double& p : power) p = p > 0.0 ? 10.0 * std::log10(p / most) : -300.0;
  return power;
}

}  // namespace

std::string suspicion_of(double ratio) {
  if (std::abs(ratio - 1.0) <= as_stated) return "";
  for (const KnownFactor& factor : known_factors) {
    if (std::abs(ratio / factor.value - 1.0) <= recognised) return "about " + std::string(factor.text);
  }
  if (ratio < dead_level) return "next to nothing: the sensor is dead or not seated";
  return fmt::format("{} times the level expected, which no usual mix-up explains", base::rounded(ratio, 3));
}

base::Answer<Calibration> calibrate(const recording::Reader& reader, recording::FrameRange range, std::size_t channel,
                                    const CalibratorTone& tone, const base::Context& context) {
  const recording::Recording& recording = reader.recording();
  if (channel >= recording.channels.size()) {
    throw base::usage_error("calibration", fmt::format("there is no channel {}", channel + 1));
  }
  const recording::Channel& of = recording.channels[channel];
  const base::Quantity quantity = of.unit.quantity;
  const std::vector<Spectrum> spectra =
      averaged_spectra(reader, range, {.window = Window::hann, .overlap = 0.5, .resolution_hz = 1.0}, context);
  const Spectrum& spectrum = spectra[channel];
  if (spectrum.density.empty()) return no_tone("the recording holds no second of valid samples");
  const auto found = tones(spectrum, {.strongest = 10, .prominence = 100.0, .band_hz = {}});
  const auto is_near = [&](const Tone& each) {
    return std::abs(each.frequency.value / tone.frequency_hz - 1.0) <= frequency_tolerance;
  };
  const auto at = std::find_if(found.begin(), found.end(), is_near);
  const std::string unit(base::si_unit(quantity).name);
  if (at == found.end() || at != found.begin()) {
    return no_tone(
        found.empty() ? fmt::format("'{}' shows no tone at all where {:.4g} Hz is expected", of.name, tone.frequency_hz)
                      : fmt::format("the strongest tone of '{}' stands at {} Hz ({} {} r.m.s.), not at {:.4g} Hz",
                                    of.name, base::rounded(found.front().frequency.value, 4),
                                    base::rounded(found.front().amplitude_rms.value), unit, tone.frequency_hz));
  }
  // An unstated unit (V, plain numbers) is what the calibration is to find, then the factor carries it to SI.
  const double expected =
      tone.rms * std::pow(2.0 * std::numbers::pi * tone.frequency_hz, integrals_between(tone.quantity, quantity));
  const double ratio = at->amplitude_rms.value / expected;
  // The spread of a line's power is twice that of its level.
  if (at->spread && 0.5 * *at->spread > unsteady) {
    return base::Refusal{"unsteady-tone",
                         fmt::format("the level of '{}' wanders by {:.0f} %", of.name, 50.0 * *at->spread),
                         "use only the steady part (part_s), or seat the sensor firmly and record again"};
  }
  Calibration out;
  out.channel = of.name;
  out.frequency_hz = at->frequency.value;
  out.measured = at->amplitude_rms;
  out.measured.quantity = quantity;
  const double relative = std::hypot(at->amplitude_rms.relative().value_or(0.0), tone.relative_u);
  out.correction = {1.0 / ratio, relative / ratio, {}, base::Quantity::ratio};
  if (motion_rank(quantity)) out.suspicion = suspicion_of(ratio);
  return out;
}

base::Answer<Calibration> calibrate_on_mass(std::span<const HitBlock> hits, double rate_hz, const HungMass& mass,
                                            const HitWindows& windows) {
  if (!(mass.kg > 0.0)) throw base::usage_error("hung mass", "the mass must be above 0");
  const FrequencyResponse response = hit_response(hits, rate_hz, base::Quantity::acceleration, windows);
  const std::size_t count = response.h1.size();
  const std::vector<double> force_db = force_level_db(hits, rate_hz, count, response.line_hz);

  std::vector<std::size_t> lines;
  for (std::size_t k = 1; k < count; ++k) {
    if (response.frequency(k) < mass.least_hz) continue;
    if (force_db[k] < -reached_db) break;  // the hammer does not reach further
    if (!response.coherence.empty() && response.coherence[k] < coherent) continue;
    lines.push_back(k);
  }
  const auto refuse = [&](const std::string& seen) {
    return base::Refusal{
        "no-level-accelerance", seen,
        "hang the mass on long soft strings, strike through its middle opposite the sensor, five clean "
        "blows"};
  };
  if (lines.size() < least_lines) return refuse(fmt::format("only {} lines are coherent", lines.size()));
  // The level stretch: lines whose |H| lies near the median, up to where an octave of them has left it.
  std::vector<double> magnitude;
  for (const std::size_t k : lines) magnitude.push_back(std::abs(response.h1[k]));
  const double median = numeric::median(magnitude);
  std::erase_if(lines, [&](std::size_t k) { return std::abs(std::abs(response.h1[k]) / median - 1.0) > level_within; });
  const bool is_level =
      lines.size() >= least_lines && lines.back() >= 2 * lines.front() &&
      static_cast<double>(lines.size()) > level_share * static_cast<double>(lines.back() - lines.front());
  if (!is_level) {
    return refuse("mass times accelerance is not level over an octave");
  }
  const std::size_t half = lines.size() / 2;
  const double mean = mean_over(response, lines);
  const double low = mean_over(response, std::span(lines).first(half));
  const double high = mean_over(response, std::span(lines).subspan(half));
  double random = 0.0;
  std::complex<double> direction = 0.0;
  for (const std::size_t k : lines) {
    if (!response.random_error.empty()) random = std::max(random, response.random_error[k]);
    direction += response.h1[k];
  }
  // Lines of one set of blows share their noise in part: the random error of one line is kept, not that of their mean.
  // The halves of the band differ by a sensor's and a mass's own unevenness, uniform between them.
  const double uneven = std::abs(high - low) / mean / std::sqrt(3.0);
  const double relative = std::sqrt(random * random + uneven * uneven + mass.relative_u * mass.relative_u);
  const double ratio = mass.kg * mean;

  Calibration out;
  out.measured = {ratio, ratio * relative, {}, base::Quantity::ratio};
  out.correction = {1.0 / ratio, relative / ratio, {}, base::Quantity::ratio};
  out.band_hz = {response.frequency(lines.front()), response.frequency(lines.back())};
  out.frequency_hz = 0.5 * (out.band_hz.lo + out.band_hz.hi);
  out.suspicion = suspicion_of(ratio);
  out.opposed = direction.real() < 0.0;
  return out;
}

}  // namespace stillmass::spectral

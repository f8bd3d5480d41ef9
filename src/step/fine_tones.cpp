#include "step/fine_tones.hpp"

#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/base/number.hpp"

namespace stillmass::step {
namespace {

using spectral::Closeness;
using spectral::Tone;
using spectral::ToneCluster;

constexpr std::size_t most_suspects = 6;   // of a channel, the strongest
constexpr double swings = 0.2;             // of the amplitude: it is said before the wander of the frequency
constexpr double told = 0.3;               // lines of the stretch: less wander is not said
constexpr double least_prominence = 30.0;  // weaker ones are not worth a second look

struct Suspect {
  std::size_t of = 0;    // which channel's tones
  std::size_t tone = 0;  // which of them
};

std::string note_of(const ToneCluster& cluster) {
  switch (cluster.closeness) {
    case Closeness::resolved:
      return fmt::format("one of {} close lines", cluster.tones.size());
    case Closeness::unresolved: {
      std::string text = fmt::format("more than one line within {} Hz", base::rounded(cluster.least_spacing_hz, 2));
      if (cluster.record_s) text += fmt::format("; record {} s to part them", base::rounded(*cluster.record_s, 2));
      return text;
    }
    case Closeness::unsteady:
      if (cluster.variation && *cluster.variation > swings) {
        return fmt::format("its amplitude varies by {} % r.m.s.", base::rounded(*cluster.variation * 100.0, 2));
      }
      if (cluster.wander_hz && *cluster.wander_hz * cluster.stretch_s < told) return "";
      if (cluster.wander_hz) return fmt::format("wanders by {} Hz r.m.s.", base::rounded(*cluster.wander_hz, 2));
      return "unsteady";
    case Closeness::single:
    case Closeness::none:
      return "";
  }
  return "";
}

// Where to look at a tone: no further than half way to the next ones, which are looked at by themselves.
base::Interval band_of(const std::vector<Tone>& tones, std::size_t which, const spectral::Spectrum& spectrum) {
  const double at = tones[which].frequency.value;
  base::Interval band = spectral::band_around(tones[which], spectrum);
  for (const Tone& other : tones) {
    const double half_way = 0.5 * (at + other.frequency.value);
    if (other.frequency.value < at) band.lo = std::max(band.lo, half_way);
    if (other.frequency.value > at) band.hi = std::min(band.hi, half_way);
  }
  return band;
}

// Without what stands on the very edge of the band: the flank of the next peak, not a tone.
ToneCluster within_band(ToneCluster cluster) {
  if (cluster.closeness != Closeness::resolved) return cluster;
  std::erase_if(cluster.tones, [&](const spectral::CloseTone& tone) {
    const double f = tone.frequency.value;
    return std::min(f - cluster.band_hz.lo, cluster.band_hz.hi - f) < cluster.least_spacing_hz;
  });
  if (cluster.tones.size() < 2) cluster.closeness = Closeness::single;
  return cluster;
}

// A tone of a cluster in the place of the peak of the averaged spectrum.
Tone part_of_peak(const Tone& peak, const spectral::CloseTone& close) {
  Tone tone = peak;
  tone.frequency = close.frequency;
  const auto quantity = peak.amplitude_rms.quantity;
  tone.amplitude_rms = close.amplitude_rms;
  tone.amplitude_rms.quantity = quantity;
  tone.breadth = 1.0;
  return tone;
}

}  // namespace

std::vector<std::vector<FineTone>> fine_tones(const recording::Reader& reader, recording::FrameRange range,
                                              const std::vector<ChannelTones>& all,
                                              const std::vector<const spectral::Spectrum*>& spectra,
                                              const base::Context& context) {
  std::vector<Suspect> suspects;
  std::vector<spectral::CloseBand> bands;
  for (std::size_t i = 0; i < all.size(); ++i) {
    std::size_t found = 0;
    for (std::size_t t = 0; t < all[i].tones.size() && found < most_suspects; ++t) {
      const Tone& tone = all[i].tones[t];
      if (tone.prominence < least_prominence || !spectral::suspect(tone)) continue;
      suspects.push_back({i, t});
      bands.push_back({all[i].channel, band_of(all[i].tones, t, *spectra[i])});
      ++found;
    }
  }
  std::vector<ToneCluster> clusters;
  if (!bands.empty()) clusters = spectral::resolve_tones(reader, range, bands, context);

  std::vector<std::vector<FineTone>> out(all.size());
  for (std::size_t i = 0; i < all.size(); ++i) {
    for (std::size_t t = 0; t < all[i].tones.size(); ++t) {
      const Tone& tone = all[i].tones[t];
      const auto suspect = std::find_if(suspects.begin(), suspects.end(),
                                        [&](const Suspect& each) { return each.of == i && each.tone == t; });
      if (suspect == suspects.end()) {
        out[i].push_back({tone, Closeness::none, {}, {}, {}, spectra[i]->line_hz});
        continue;
      }
      const ToneCluster measured = within_band(clusters[static_cast<std::size_t>(suspect - suspects.begin())]);
      const ToneCluster cluster =
          base::is_motion(tone.amplitude_rms.quantity)
              ? spectral::as_quantity(measured, reader.recording().channels[all[i].channel].unit.quantity,
                                      tone.amplitude_rms.quantity)
              : measured;
      if (cluster.closeness == Closeness::resolved) {
        for (const spectral::CloseTone& close : cluster.tones) {
          out[i].push_back(
              {part_of_peak(tone, close), cluster.closeness, note_of(cluster), {}, {}, cluster.least_spacing_hz});
        }
      } else {
        const bool wanders = cluster.closeness == Closeness::unsteady && !cluster.tones.empty();
        out[i].push_back({wanders ? part_of_peak(tone, cluster.tones.front()) : tone, cluster.closeness,
                          note_of(cluster), wanders ? cluster.wander_hz : std::nullopt,
                          wanders ? cluster.variation : std::nullopt, spectra[i]->line_hz});
      }
    }
    std::stable_sort(out[i].begin(), out[i].end(), [](const FineTone& a, const FineTone& b) {
      return a.tone.amplitude_rms.value > b.tone.amplitude_rms.value;
    });
  }
  return out;
}

std::vector<std::vector<spectral::CloseTone>> tones_within(const recording::Reader& reader, recording::FrameRange range,
                                                           const std::vector<std::size_t>& channels,
                                                           base::Interval band_hz, const base::Context& context) {
  std::vector<spectral::CloseBand> bands;
  for (const std::size_t channel : channels) bands.push_back({channel, band_hz});
  std::vector<std::vector<spectral::CloseTone>> out;
  for (const ToneCluster& cluster : spectral::resolve_tones(reader, range, bands, context)) {
    const bool are_tones = cluster.closeness == Closeness::resolved || cluster.closeness == Closeness::single;
    out.push_back(are_tones ? cluster.tones : std::vector<spectral::CloseTone>{});
  }
  return out;
}

}  // namespace stillmass::step
